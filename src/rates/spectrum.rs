//! Published energy spectra of gamma-ray sources and cosmic rays.

use thiserror::Error;

/// A spectrum that is not known or out of range.
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

/// A differential spectrum, m^-2 s^-1 TeV^-1 (and sr^-1 if diffuse), E total energy:
/// flux (E / pivot)^(-index - curvature log10(E / pivot)) exp(-E / cutoff), with a smooth break
/// [1 + (E / E_b)^(d / s)]^s where one is given.
#[derive(Clone, Debug, PartialEq)]
pub struct Spectrum {
    /// Flux at the pivot.
    pub flux_m2_s_tev: f64,
    /// Pivot, TeV.
    pub pivot_tev: f64,
    /// Index, positive for falling spectra.
    pub index: f64,
    /// Curvature of a log-parabola, per decade.
    pub curvature: f64,
    /// Exponential cut-off, TeV; infinite if none.
    pub cutoff_tev: f64,
    /// Break energy in TeV, change of index, smoothness.
    pub smooth_break: Option<(f64, f64, f64)>,
    /// Citation.
    pub source: String,
}

/// Built-in spectra: name, flux, pivot, index, curvature, cutoff, break, citation.
const TABLE: &str = include_str!("data/spectra.csv");

impl Spectrum {
    /// A power law with a pivot of its own.
    pub fn power_law(
        flux_m2_s_tev: f64,
        pivot_tev: f64,
        index: f64,
        cutoff_tev: Option<f64>,
    ) -> Self {
        Self {
            flux_m2_s_tev,
            pivot_tev,
            index,
            curvature: 0.0,
            cutoff_tev: cutoff_tev.unwrap_or(f64::INFINITY),
            smooth_break: None,
            source: "stated in the study".into(),
        }
    }

    /// A built-in spectrum.
    ///
    /// # Errors
    /// [`SpectrumError::Unknown`], listing the names there are.
    pub fn named(name: &str) -> Result<Self, SpectrumError> {
        let rows = TABLE.lines().filter(|row| !row.starts_with('#')).skip(1);
        let mut known = Vec::new();
        for row in rows {
            let fields: Vec<&str> = row.splitn(10, ',').collect();
            if fields[0] != name {
                known.push(fields[0]);
                continue;
            }
            let number = |index: usize| fields[index].parse::<f64>().unwrap_or(f64::NAN);
            let (at, change, smoothness) = (number(6), number(7), number(8));
            return Ok(Self {
                flux_m2_s_tev: number(1),
                pivot_tev: number(2),
                index: number(3),
                curvature: number(4),
                cutoff_tev: if fields[5] == "none" { f64::INFINITY } else { number(5) },
                smooth_break: at.is_finite().then_some((at, change, smoothness)),
                source: fields[9].trim_matches('"').into(),
            });
        }
        Err(SpectrumError::Unknown { name: name.into(), known: known.join(", ") })
    }

    /// The flux at an energy, m^-2 s^-1 TeV^-1 (sr^-1).
    pub fn flux_m2_s_tev(&self, energy_gev: f64) -> f64 {
        let energy = 1e-3 * energy_gev;
        let ratio = energy / self.pivot_tev;
        let power = ratio.powf(-self.index - self.curvature * ratio.log10());
        let bend = self.smooth_break.map_or(1.0, |(at, change, smoothness)| {
            (1.0 + (energy / at).powf(change / smoothness)).powf(smoothness)
        });
        self.flux_m2_s_tev * power * bend * (-energy / self.cutoff_tev).exp()
    }

    /// The flux at an energy per GeV instead of per TeV.
    pub fn flux_m2_s_gev(&self, energy_gev: f64) -> f64 {
        1e-3 * self.flux_m2_s_tev(energy_gev)
    }
}
