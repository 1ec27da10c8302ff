//! Energy spectra of gamma-ray sources and cosmic rays, published or stated in a study.

use std::collections::BTreeSet;

use thiserror::Error;

use crate::numerics::quadrature::integrate;

/// A spectrum that is not known.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum SpectrumError {
    /// No built-in spectrum of that name.
    #[error("unknown spectrum `{name}`; known: {known}")]
    Unknown {
        /// What was asked for.
        name: String,
        /// The built-in names.
        known: String,
    },
}

/// Particles of which the flux is a function of rigidity.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Rigid {
    /// Charge number.
    pub charge: f64,
    /// Mass, GeV.
    pub mass_gev: f64,
}

/// One term of a spectrum:
/// flux (x / pivot)^(-index - curvature log10(x / pivot)) exp(-x / cutoff), with a smooth break
/// [1 + (x / x_b)^(change / smoothness)]^smoothness where one is given. x is the total energy of
/// the particle, or its rigidity.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Term {
    /// Flux at the pivot, m^-2 s^-1 TeV^-1 (or TV^-1).
    pub flux: f64,
    /// Pivot, TeV (or TV).
    pub pivot: f64,
    /// Index, positive for falling spectra.
    pub index: f64,
    /// Curvature of a log-parabola, per decade.
    pub curvature: f64,
    /// Exponential cut-off, TeV (or TV); infinite if none.
    pub cutoff: f64,
    /// Position, change of the exponent above it (negative: steeper), smoothness of the same sign.
    pub smooth_break: Option<(f64, f64, f64)>,
    /// Set if x is rigidity.
    pub rigid: Option<Rigid>,
}

impl Term {
    fn power_law(flux: f64, pivot: f64, index: f64) -> Self {
        let (curvature, cutoff) = (0.0, f64::INFINITY);
        Self { flux, pivot, index, curvature, cutoff, smooth_break: None, rigid: None }
    }

    fn density(&self, x: f64) -> f64 {
        let ratio = x / self.pivot;
        let power = ratio.powf(-self.index - self.curvature * ratio.log10());
        let bend = self.smooth_break.map_or(1.0, |(at, change, smoothness)| {
            (1.0 + (x / at).powf(change / smoothness)).powf(smoothness)
        });
        self.flux * power * bend * (-x / self.cutoff).exp()
    }

    /// Per TeV of total energy. For rigidity R = sqrt(E^2 - m^2) / Z, dR/dE = E / (Z^2 R).
    fn flux_tev(&self, energy_tev: f64) -> f64 {
        let Some(Rigid { charge, mass_gev }) = self.rigid else {
            return self.density(energy_tev);
        };
        let square = energy_tev * energy_tev - (1e-3 * mass_gev).powi(2);
        if square <= 0.0 {
            return 0.0;
        }
        let rigidity = square.sqrt() / charge;
        self.density(rigidity) * energy_tev / (charge * charge * rigidity)
    }
}

/// A differential spectrum, m^-2 s^-1 TeV^-1 (and sr^-1 if diffuse), by the total energy of the
/// particle: a sum of [`Term`]s.
#[derive(Clone, Debug, PartialEq)]
pub struct Spectrum {
    /// The terms.
    pub terms: Vec<Term>,
    /// Range in which it was measured, TeV (TV); beyond it the form is extrapolated.
    pub range_tev: (f64, f64),
    /// Citation.
    pub source: String,
}

/// Built-in spectra.
const TABLE: &str = include_str!("data/spectra.csv");
/// Columns of the table.
const FIELDS: usize = 14;

/// Rows of the table: names, numbers (NaN for `none`), citation.
fn rows() -> impl Iterator<Item = (&'static str, Vec<f64>, &'static str)> {
    TABLE.lines().filter(|row| !row.starts_with('#')).skip(1).map(|row| {
        let fields: Vec<&str> = row.splitn(FIELDS, ',').collect();
        let numbers = fields[1..FIELDS - 1].iter().map(|text| text.parse().unwrap_or(f64::NAN));
        (fields[0], numbers.collect(), fields[FIELDS - 1].trim_matches('"'))
    })
}

impl Spectrum {
    fn stated(term: Term) -> Self {
        let range_tev = (0.0, f64::INFINITY);
        Self { terms: vec![term], range_tev, source: "stated in the study".into() }
    }

    /// A power law, with an exponential cut-off if one is given.
    pub fn power_law(
        flux_m2_s_tev: f64,
        pivot_tev: f64,
        index: f64,
        cutoff_tev: Option<f64>,
    ) -> Self {
        let cutoff = cutoff_tev.unwrap_or(f64::INFINITY);
        Self::stated(Term { cutoff, ..Term::power_law(flux_m2_s_tev, pivot_tev, index) })
    }

    /// A log-parabola: the index grows by `curvature` log10(E / pivot).
    pub fn log_parabola(flux_m2_s_tev: f64, pivot_tev: f64, index: f64, curvature: f64) -> Self {
        Self::stated(Term { curvature, ..Term::power_law(flux_m2_s_tev, pivot_tev, index) })
    }

    /// A published spectrum by name; `src/rates/data/spectra.csv` lists them with their sources.
    ///
    /// The names of [`Species`](crate::shower::Species) are among them. `electron` is electrons and
    /// positrons together; `nitrogen`, `silicon` and `iron` stand for their groups.
    ///
    /// # Errors
    /// [`SpectrumError::Unknown`], listing the names there are.
    pub fn named(name: &str) -> Result<Self, SpectrumError> {
        let mut found: Option<Self> = None;
        for (_, numbers, source) in rows().filter(|row| row.0.split(' ').any(|one| one == name)) {
            let [
                flux,
                pivot,
                index,
                curvature,
                cutoff,
                at,
                change,
                smoothness,
                charge,
                mass_gev,
                low,
                high,
            ] = numbers[..]
            else {
                continue;
            };
            let term = Term {
                flux,
                pivot,
                index,
                curvature,
                cutoff: if cutoff.is_nan() { f64::INFINITY } else { cutoff },
                smooth_break: (!at.is_nan()).then_some((at, change, smoothness)),
                rigid: (!charge.is_nan()).then_some(Rigid { charge, mass_gev }),
            };
            let spectrum = found.get_or_insert_with(|| Self {
                terms: Vec::new(),
                range_tev: (low, high),
                source: source.into(),
            });
            spectrum.terms.push(term);
        }
        found.ok_or_else(|| SpectrumError::Unknown {
            name: name.into(),
            known: Self::names().join(", "),
        })
    }

    /// Names of the published spectra.
    pub fn names() -> Vec<&'static str> {
        let names: BTreeSet<&str> = rows().flat_map(|row| row.0.split(' ')).collect();
        names.into_iter().collect()
    }

    /// The flux at an energy, m^-2 s^-1 TeV^-1 (sr^-1).
    pub fn flux_m2_s_tev(&self, energy_gev: f64) -> f64 {
        self.terms.iter().map(|term| term.flux_tev(1e-3 * energy_gev)).sum()
    }

    /// The flux at an energy per GeV instead of per TeV.
    pub fn flux_m2_s_gev(&self, energy_gev: f64) -> f64 {
        1e-3 * self.flux_m2_s_tev(energy_gev)
    }

    /// The flux between two energies, m^-2 s^-1 (sr^-1), by quadrature in ln E: 8 points for each
    /// half of an e-fold, good to 1e-9 for the published forms away from a sharp break.
    pub fn integral_m2_s(&self, low_gev: f64, high_gev: f64) -> f64 {
        let (low, high) = (low_gev.ln(), high_gev.ln());
        let panels = (2.0 * (high - low)).ceil().max(1.0) as usize;
        integrate(low, high, panels, |log| {
            let energy = log.exp();
            energy * self.flux_m2_s_gev(energy)
        })
    }

    /// Whether an energy lies in the range that was measured.
    pub fn covers(&self, energy_gev: f64) -> bool {
        let energy = 1e-3 * energy_gev;
        let reach = |term: &Term| term.rigid.map_or(energy, |rigid| energy / rigid.charge);
        self.terms.iter().all(|term| (self.range_tev.0..=self.range_tev.1).contains(&reach(term)))
    }
}
