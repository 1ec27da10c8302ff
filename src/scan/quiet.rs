//! The lowest quiet threshold of an array.

use thiserror::Error;

use crate::telescope::QuietError;
use crate::telescope::accidental::TRIED_PE;

use super::array::{Array, ArrayRates};

/// What makes a threshold quiet.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct QuietRule {
    /// Accidental coincidences of the array are at most this share of its shower triggers.
    pub accidental_share: f64,
    /// Accidental and shower triggers of one telescope together stay below this rate, Hz.
    pub readout_limit_hz: f64,
}

/// An array without a quiet threshold.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum NotQuiet {
    /// A telescope cannot be made quiet.
    #[error(transparent)]
    Telescope(#[from] QuietError),
    /// No threshold fits the rule.
    #[error(
        "no pixel threshold up to {highest_pe} photoelectrons is quiet: there the array has \
         {accidental_hz:.3e} Hz of accidentals and {shower_hz:.3e} Hz of showers, and a telescope \
         triggers at {telescope_hz:.3e} Hz"
    )]
    Rule {
        /// Highest threshold tried, photoelectrons.
        highest_pe: f64,
        /// Accidental coincidences there, Hz.
        accidental_hz: f64,
        /// Shower triggers there, Hz.
        shower_hz: f64,
        /// Triggers of one telescope there, Hz.
        telescope_hz: f64,
    },
    /// The lowest quiet threshold is above all showers.
    #[error(
        "no shower triggers the array at {threshold_pe} photoelectrons, the lowest threshold at \
         which the sky leaves it quiet; simulate more showers or stand the telescopes closer"
    )]
    NoShowers {
        /// The threshold.
        threshold_pe: f64,
    },
}

impl QuietRule {
    /// Whether rates fit the rule; `quiet` are the kinds that it sets.
    pub fn fits(&self, rates: &ArrayRates, quiet: &[usize]) -> bool {
        let most = self.accidental_share * rates.array_shower_hz.value;
        rates.array_accidental_hz <= most
            && quiet.iter().all(|&kind| telescope_hz(rates, kind) <= self.readout_limit_hz)
    }
}

fn telescope_hz(rates: &ArrayRates, kind: usize) -> f64 {
    rates.accidental_hz[kind] + rates.shower_hz[kind].value
}

impl Array {
    /// The lowest quiet thresholds by kind: those given stay, those that are `None` are set.
    ///
    /// Thresholds are tried in steps of 0.05 photoelectrons on the first of the kinds to be set;
    /// the others take the lowest at which one of their telescopes has no more accidental triggers
    /// than one of the first. Both sides of the rule fall with rising thresholds, accidentals much
    /// faster, so the lowest is found by halving.
    ///
    /// A kind that the array lacks keeps its given threshold, or has NaN.
    ///
    /// # Errors
    /// [`NotQuiet`] with the reason.
    pub fn quiet_thresholds_pe(
        &self,
        given_pe: &[Option<f64>],
        rule: &QuietRule,
    ) -> Result<Vec<f64>, NotQuiet> {
        let present = |kind: &usize| self.kinds.contains(kind);
        let quiet: Vec<usize> =
            (0..given_pe.len()).filter(|&k| given_pe[k].is_none() && present(&k)).collect();
        let Some((&first, others)) = quiet.split_first() else {
            return Ok(given_pe.iter().map(|pe| pe.unwrap_or(f64::NAN)).collect());
        };
        let (lowest, highest, step) = TRIED_PE;
        let highest = highest.min(self.accidental[first].largest_margin_pe());
        let set = |place: usize| -> Result<Vec<f64>, NotQuiet> {
            let threshold = lowest + place as f64 * step;
            let mut all: Vec<f64> = given_pe.iter().map(|pe| pe.unwrap_or(f64::NAN)).collect();
            all[first] = threshold;
            for &kind in others {
                let most_hz = self.accidental[first].rate_hz(threshold);
                all[kind] = self.accidental[kind].quiet_threshold_pe("a telescope", most_hz)?;
            }
            Ok(all)
        };
        let end = ((highest - lowest) / step).floor().max(0.0) as usize;
        let there = self.rates(&set(end)?);
        if !rule.fits(&there, &quiet) {
            return Err(NotQuiet::Rule {
                highest_pe: lowest + end as f64 * step,
                accidental_hz: there.array_accidental_hz,
                shower_hz: there.array_shower_hz.value,
                telescope_hz: telescope_hz(&there, first),
            });
        }
        let (mut loud, mut calm) = (0, end);
        while loud < calm {
            let middle = loud + (calm - loud) / 2;
            if rule.fits(&self.rates(&set(middle)?), &quiet) {
                calm = middle;
            } else {
                loud = middle + 1;
            }
        }
        let found = set(calm)?;
        if self.rates(&found).array_shower_hz.value > 0.0 {
            return Ok(found);
        }
        Err(NotQuiet::NoShowers { threshold_pe: found[first] })
    }
}
