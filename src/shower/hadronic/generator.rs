//! One inelastic interaction on air.
//!
//! A nucleon keeps a fraction x of its energy drawn from (1 + a)(1 - x)^a, a = 0.3, and may leave
//! as the other nucleon, probability 0.78 (1 - x)^2; the rest is shared out among mesons
//! ([`super::sharing`]). A meson shares out all of its energy; the first meson out of a kaon is a
//! kaon. Energy is conserved event by event: what mesons do not take goes to the struck nucleus.
//! Charge is conserved event by event: the struck nucleon is a proton or a neutron with equal
//! probability before and after, and the softest mesons change their charge until the sum is right.
//! Transverse momenta are drawn from pT exp(-2 pT / mean) and balanced by taking off their mean.
//!
//! Left out: baryon pairs (3 to 5 % of the energy), strangeness conservation event by event, charm,
//! nuclear fragments (they stay below the Cherenkov threshold).

use crate::consts::PROTON_MASS_GEV;
use crate::numerics::Stream;

use super::particle::{Kind, Secondary};
use super::sharing::{
    BEHIND_NUCLEON, OF_MESON, meson_of_pion, meson_of_proton, neutral_kaon, share_out,
};

/// Power of the leading nucleon's (1 - x).
const LEADING_POWER: f64 = 0.3;
/// Probability of charge exchange at x = 0; it falls as (1 - x)^2.
const EXCHANGE: f64 = 0.78;
/// Mean transverse momentum at 100 GeV of pions, kaons and leading nucleons, GeV/c, from memory:
/// fixed-target and ISR data, 0.33 to 0.36, 0.42, 0.48; it rises by 2 % a decade.
const MEAN_TRANSVERSE_GEV: [f64; 3] = [0.35, 0.42, 0.48];
const TRANSVERSE_RISE: f64 = 0.02;

/// What an interaction gives.
#[derive(Clone, Debug, Default)]
pub struct Interaction {
    /// Particles, the leading nucleon first if there is one.
    pub secondaries: Vec<Secondary>,
    /// Energy that goes to the struck nucleus, GeV.
    pub target_gev: f64,
    /// Charge of the struck nucleon before and after.
    pub target_charge: [i32; 2],
    energies: Vec<f64>,
}

impl Interaction {
    /// Draws the interaction of a hadron of `energy_gev` on air.
    ///
    /// # Validity
    /// 1 GeV to 100 TeV; below 5 GeV only energy and charge are held to anything.
    pub fn draw(&mut self, kind: Kind, energy_gev: f64, stream: &mut Stream) {
        self.secondaries.clear();
        self.energies.clear();
        let struck = |stream: &mut Stream| i32::from(stream.uniform() < 0.5);
        self.target_charge = [struck(stream), struck(stream)];
        if kind.is_nucleon() {
            self.nucleon(kind, energy_gev, stream);
        } else {
            self.meson(kind, energy_gev, stream);
        }
        self.settle_charge(kind);
        self.settle_momenta(energy_gev, stream);
    }

    fn nucleon(&mut self, kind: Kind, energy_gev: f64, stream: &mut Stream) {
        let kinetic = (energy_gev - PROTON_MASS_GEV).max(0.0);
        let kept = 1.0 - stream.uniform_positive().powf(1.0 / (1.0 + LEADING_POWER));
        let exchanged = stream.uniform() < EXCHANGE * (1.0 - kept).powi(2);
        let out = match (kind, exchanged) {
            (Kind::Proton, false) | (Kind::Neutron, true) => Kind::Proton,
            _ => Kind::Neutron,
        };
        // The leading nucleon takes up what its rest mass differs.
        let leading = kept * kinetic + out.mass_gev();
        self.push(out, leading);
        let left = energy_gev - leading;
        self.target_gev =
            share_out(left.max(0.0), BEHIND_NUCLEON, stream, &mut self.energies) + left.min(0.0);
        for index in 0..self.energies.len() {
            let energy = self.energies[index];
            let meson = meson_of_proton(energy / energy_gev, stream);
            let meson = match (kind, meson) {
                // Isospin turns the proton's pions into the neutron's; kaons likewise.
                (Kind::Neutron, Kind::PionPlus | Kind::PionMinus) => meson.conjugate(),
                (Kind::Neutron, Kind::KaonPlus) if stream.uniform() < 0.5 => neutral_kaon(stream),
                _ => meson,
            };
            self.meson_or_target(meson, energy);
        }
    }

    fn meson(&mut self, kind: Kind, energy_gev: f64, stream: &mut Stream) {
        self.target_gev = share_out(energy_gev, OF_MESON, stream, &mut self.energies);
        for index in 0..self.energies.len() {
            let energy = self.energies[index];
            let drawn = meson_of_pion(energy / energy_gev, stream);
            let meson = if kind.is_kaon() && index == 0 {
                if kind.charge() != 0 && stream.uniform() < 0.6 {
                    kind
                } else {
                    neutral_kaon(stream)
                }
            } else if kind.charge() < 0
                || (kind.charge() == 0
                    && matches!(drawn, Kind::PionPlus | Kind::PionMinus)
                    && stream.uniform() < 0.5)
            {
                drawn.conjugate()
            } else {
                drawn
            };
            self.meson_or_target(meson, energy);
        }
    }

    /// Energy too small for the meson's mass goes to the target.
    fn meson_or_target(&mut self, kind: Kind, energy_gev: f64) {
        if energy_gev > kind.mass_gev() {
            self.push(kind, energy_gev);
        } else {
            self.target_gev += energy_gev;
        }
    }

    fn push(&mut self, kind: Kind, energy_gev: f64) {
        let along_gev = (energy_gev.powi(2) - kind.mass_gev().powi(2)).max(0.0).sqrt();
        self.secondaries.push(Secondary { kind, energy_gev, transverse_gev: [0.0; 2], along_gev });
    }

    /// Changes the charge of pions, the softest first, until the sum is right; if there are not
    /// enough, the struck nucleon's last.
    fn settle_charge(&mut self, kind: Kind) {
        let sum: i32 = self.secondaries.iter().map(|particle| particle.kind.charge()).sum();
        let mut missing = kind.charge() + self.target_charge[0] - self.target_charge[1] - sum;
        while missing != 0 {
            let wanted = missing.signum();
            let softest = self
                .secondaries
                .iter_mut()
                .filter(|particle| raised(particle.kind, wanted).is_some())
                .min_by(|a, b| a.energy_gev.total_cmp(&b.energy_gev));
            let Some(particle) = softest else { break };
            if let Some(kind) = raised(particle.kind, wanted) {
                particle.kind = kind;
                let momentum2 = particle.energy_gev.powi(2) - kind.mass_gev().powi(2);
                particle.along_gev = momentum2.max(0.0).sqrt();
            }
            missing -= wanted;
        }
        // Without a pion left to change, several nucleons of the nucleus share the difference.
        self.target_charge[1] += missing;
    }

    fn settle_momenta(&mut self, energy_gev: f64, stream: &mut Stream) {
        let rise = 1.0 + TRANSVERSE_RISE * (energy_gev / 100.0).log10();
        let mut sum = [0.0; 2];
        for particle in &mut self.secondaries {
            let mean = rise
                * match particle.kind {
                    nucleon if nucleon.is_nucleon() => MEAN_TRANSVERSE_GEV[2],
                    kaon if kaon.is_kaon() => MEAN_TRANSVERSE_GEV[1],
                    _ => MEAN_TRANSVERSE_GEV[0],
                };
            // Density pT exp(-2 pT / mean): the sum of two exponentials.
            let size = 0.5 * mean * (stream.exponential() + stream.exponential());
            let (cos, sin) = stream.direction();
            particle.transverse_gev = [size * cos, size * sin];
            sum[0] += particle.transverse_gev[0];
            sum[1] += particle.transverse_gev[1];
        }
        // The struck nucleon is one more that recoils.
        let count = self.secondaries.len() as f64 + 1.0;
        for particle in &mut self.secondaries {
            let momentum = particle.along_gev;
            let [x, y] = particle.transverse_gev;
            let (x, y) = (x - sum[0] / count, y - sum[1] / count);
            // A slow particle cannot carry more across than it has.
            let size = x.hypot(y);
            let shrink = if size > 0.95 * momentum { 0.95 * momentum / size } else { 1.0 };
            particle.transverse_gev = [x * shrink, y * shrink];
            let across2 = particle.transverse_gev[0].powi(2) + particle.transverse_gev[1].powi(2);
            particle.along_gev = (momentum * momentum - across2).max(0.0).sqrt();
        }
    }
}

/// The pion of one charge more (`step` 1) or less (-1).
fn raised(kind: Kind, step: i32) -> Option<Kind> {
    match (kind, step) {
        (Kind::PionMinus, 1) | (Kind::PionPlus, -1) => Some(Kind::PionZero),
        (Kind::PionZero, 1) => Some(Kind::PionPlus),
        (Kind::PionZero, -1) => Some(Kind::PionMinus),
        _ => None,
    }
}
