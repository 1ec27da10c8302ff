//! Total interaction rates and smooth losses, tabulated in the logarithm of energy.

use super::particle::Cuts;
use super::scattering::Scattering;
use super::{bremsstrahlung, collisions, compton, material, pair};
use crate::consts::ELECTRON_MASS_GEV;
use crate::numerics::UniformTable;

/// Highest tabulated energy, GeV.
const TOP_GEV: f64 = 200_000.0;
/// Table rows per factor e of energy: linear interpolation is good to 1e-4.
const ROWS_PER_E: f64 = 24.0;

/// Rates and losses of an electron or positron at one energy.
#[derive(Clone, Copy, Debug, Default)]
#[repr(align(64))]
pub struct ChargedRow {
    /// Upper bound of `total` over the energies one step can reach, cm2/g.
    pub bound: f32,
    /// Rate of all collisions followed one by one, cm2/g.
    pub total: f32,
    /// Rate of hard radiation, cm2/g.
    pub radiation: f32,
    /// The former plus knock-on electrons, cm2/g.
    pub knock_on: f32,
    /// The former plus annihilation, cm2/g; the rest of the total is large-angle scattering.
    pub annihilation: f32,
    /// Restricted ionisation loss without density effect, GeV per g/cm2.
    pub ionisation: f32,
    /// 2 pi r_e^2 m c^2 N_A Z/A / beta^2, GeV per g/cm2: times the density effect.
    pub density_scale: f32,
    /// Loss to soft photons, GeV per g/cm2.
    pub soft_radiation: f32,
    /// Square of the smallest large scattering angle, rad^2.
    pub edge_rad2: f32,
    /// Mean square of the small scattering angles in space, rad^2 per g/cm2.
    pub soft_rad2: f32,
}

/// Rates of a photon at one energy, cm2/g.
#[derive(Clone, Copy, Debug, Default)]
pub struct PhotonRow {
    /// Rate of all interactions.
    pub total: f32,
    /// Rate of pair production.
    pub pair: f32,
}

/// The tables.
#[derive(Clone, Debug)]
pub struct Rates {
    log_low: f64,
    electron: Vec<ChargedRow>,
    positron: Vec<ChargedRow>,
    photon: Vec<PhotonRow>,
    density_effect: UniformTable,
}

impl Rates {
    /// Tables for the given cuts.
    pub fn new(cuts: &Cuts) -> Self {
        let low = (0.7 * cuts.electron_gev.min(cuts.photon_gev)).max(0.1 * ELECTRON_MASS_GEV);
        let log_low = low.ln();
        let count = ((TOP_GEV.ln() - log_low) * ROWS_PER_E).ceil() as usize + 2;
        let energy = |row: usize| (log_low + row as f64 / ROWS_PER_E).exp();
        let charged = |positron: bool| {
            let mut rows: Vec<_> =
                (0..count).map(|row| charged_row(energy(row), cuts, positron)).collect();
            bound(&mut rows);
            rows
        };
        let photon = |row: usize| {
            let pair = pair::pair_cm2_g(energy(row));
            PhotonRow {
                total: (pair + compton::compton_cm2_g(energy(row))) as f32,
                pair: pair as f32,
            }
        };
        Self {
            log_low,
            electron: charged(false),
            positron: charged(true),
            photon: (0..count).map(photon).collect(),
            density_effect: UniformTable::new(-2.0, 10.0, 1201, material::density_effect),
        }
    }

    #[inline]
    fn place(&self, energy_gev: f64, rows: usize) -> (usize, f32) {
        let place = ((energy_gev.ln() - self.log_low) * ROWS_PER_E).max(0.0);
        let low = (place as usize).min(rows - 2);
        (low, (place - low as f64) as f32)
    }

    /// Rates of a charged particle.
    #[inline]
    pub fn charged(&self, energy_gev: f64, positron: bool) -> ChargedRow {
        let table = if positron { &self.positron } else { &self.electron };
        let (low, share) = self.place(energy_gev, table.len());
        let (a, b) = (&table[low], &table[low + 1]);
        let mix = |a: f32, b: f32| a + share * (b - a);
        ChargedRow {
            bound: a.bound.max(b.bound),
            total: mix(a.total, b.total),
            radiation: mix(a.radiation, b.radiation),
            knock_on: mix(a.knock_on, b.knock_on),
            annihilation: mix(a.annihilation, b.annihilation),
            ionisation: mix(a.ionisation, b.ionisation),
            density_scale: mix(a.density_scale, b.density_scale),
            soft_radiation: mix(a.soft_radiation, b.soft_radiation),
            edge_rad2: mix(a.edge_rad2, b.edge_rad2),
            soft_rad2: mix(a.soft_rad2, b.soft_rad2),
        }
    }

    /// Rates of a photon.
    #[inline]
    pub fn photon(&self, energy_gev: f64) -> PhotonRow {
        let (low, share) = self.place(energy_gev, self.photon.len());
        let (a, b) = (&self.photon[low], &self.photon[low + 1]);
        PhotonRow {
            total: a.total + share * (b.total - a.total),
            pair: a.pair + share * (b.pair - a.pair),
        }
    }

    /// Density effect at log10 of beta gamma plus half log10 of relative density.
    #[inline]
    pub fn density_effect(&self, log_momentum: f64) -> f64 {
        self.density_effect.value(log_momentum)
    }
}

fn charged_row(energy_gev: f64, cuts: &Cuts, positron: bool) -> ChargedRow {
    if energy_gev <= 1.001 * ELECTRON_MASS_GEV {
        return charged_row(1.002 * ELECTRON_MASS_GEV, cuts, positron);
    }
    let kinetic = energy_gev - ELECTRON_MASS_GEV;
    let transfer = cuts.electron_gev - ELECTRON_MASS_GEV;
    let scattering = Scattering::new(energy_gev);
    let radiation = bremsstrahlung::hard_cm2_g(energy_gev, cuts.soft_photon_gev);
    let knock_on = radiation + collisions::knock_on_cm2_g(energy_gev, transfer, positron);
    let annihilation =
        knock_on + if positron { collisions::annihilation_cm2_g(energy_gev) } else { 0.0 };
    let beta2 = 1.0 - (ELECTRON_MASS_GEV / energy_gev).powi(2);
    let total = annihilation + scattering.hard_cm2_g;
    ChargedRow {
        bound: total as f32,
        total: total as f32,
        radiation: radiation as f32,
        knock_on: knock_on as f32,
        annihilation: annihilation as f32,
        ionisation: material::bare_ionisation_gev_cm2_g(kinetic, transfer, positron) as f32,
        density_scale: (material::loss_constant_gev_cm2_g() / beta2) as f32,
        soft_radiation: bremsstrahlung::soft_loss_gev_cm2_g(energy_gev, cuts.soft_photon_gev)
            as f32,
        edge_rad2: scattering.edge_rad2 as f32,
        soft_rad2: scattering.soft_rad2_cm2_g as f32,
    }
}

/// A step ends at no less than 0.7 of its starting energy: the bound is the largest total there.
fn bound(rows: &mut [ChargedRow]) {
    let reach = ((1.0_f64 / 0.7).ln() * ROWS_PER_E).ceil() as usize + 1;
    for index in (0..rows.len()).rev() {
        let first = index.saturating_sub(reach);
        let most = rows[first..=index].iter().map(|row| row.total).fold(0.0, f32::max);
        rows[index].bound = most;
    }
}
