//! How far from the array cores must be thrown, and what lies beyond.
//!
//! Rings of impact distance begin at a reach that holds for usual telescopes. If the rate of the
//! layouts, continued beyond the outermost ring, shows more than [`BEYOND`] of it outside, the rings
//! are enlarged and the events thrown again. Tables of events are named by their throw, so that
//! the same study finds its table again.

use crate::rates::{self, beyond_fraction, ring_rates_hz};

use super::{Planned, Weighted};

/// Outer radii of the rings beyond the outermost telescope, m at zenith: gamma rays, and cosmic
/// rays, of which single muons and fragments far from the core trigger too.
const GAMMA_M: [f64; 3] = [80.0, 220.0, 420.0];
const DIFFUSE_M: [f64; 3] = [80.0, 280.0, 620.0];
/// Share of a rate that may lie beyond the outermost ring.
pub const BEYOND: f64 = 0.02;
/// Factor of one enlargement.
pub const GROWTH: f64 = 1.5;
/// Enlargements at most; after them the report says what is left.
pub const ENLARGEMENTS: usize = 3;
/// Words with triggers in the outermost ring below which it says nothing.
const LEAST_WORDS: usize = 12;

/// Rings for telescopes within `extent_m` of the centre, m.
pub fn rings_m(extent_m: f64, zenith_rad: f64, diffuse: bool) -> Vec<f64> {
    let reach = if diffuse { DIFFUSE_M } else { GAMMA_M };
    reach.iter().map(|edge| extent_m + edge / zenith_rad.cos()).collect()
}

impl Planned<'_> {
    /// All primaries: the gamma rays, then the backgrounds.
    pub(super) fn primaries(&self) -> impl Iterator<Item = &Weighted> {
        core::iter::once(&self.gamma).chain(&self.backgrounds)
    }

    /// Share of the layouts' rate beyond the outermost ring, by exponential continuation; NaN if
    /// too few triggers say so.
    pub(super) fn beyond(&self, weighted: &Weighted) -> f64 {
        let sample = &weighted.sample;
        let radii = &sample.throw.rings_m;
        let mut rings = vec![0.0; radii.len()];
        let mut outermost = 0;
        for layout in 0..self.study.layouts.len() {
            let unset =
                |&column: &usize| self.thresholds_pe[layout][self.columns[column].kind].is_nan();
            if self.members[layout].len() > MOST_VOTERS || self.members[layout].iter().any(unset) {
                continue;
            }
            let plane = self.vote(sample, layout, &self.thresholds_pe[layout]);
            let words = rates::word_rates(&sample.words, &plane, &weighted.spectrum);
            let of_rings = ring_rates_hz(&sample.words, &words, radii.len());
            rings.iter_mut().zip(of_rings).for_each(|(sum, rate)| *sum += rate);
            let last = sample.words.iter().zip(&plane);
            let lit = last.filter(|(word, bits)| word.ring + 1 == radii.len() && **bits != 0);
            outermost = lit.count().max(outermost);
        }
        if outermost < LEAST_WORDS {
            return f64::NAN;
        }
        let total: f64 = rings.iter().sum();
        // A density that does not fall says only that the outermost ring is not the end.
        let share = rings.last().map_or(0.0, |last| last / total);
        let beyond = beyond_fraction(radii, &rings);
        if beyond.is_finite() { beyond } else { share }
    }

    /// What the reader must know of the throw: cores beyond the thrown radius.
    pub(super) fn reach_note(&self, weighted: &Weighted) -> String {
        let radius = weighted.sample.throw.rings_m.last().copied().unwrap_or(0.0);
        let (name, beyond) = (weighted.sample.species, self.beyond(weighted));
        if beyond.is_nan() {
            format!(
                "{name}: cores thrown to {radius:.0} m; too few triggers far out to say what lies beyond"
            )
        } else {
            format!(
                "{name}: cores thrown to {radius:.0} m; {:.1} % of the layouts' rate lies beyond by extrapolation",
                100.0 * beyond
            )
        }
    }
}

/// Layouts of more telescopes than this are grounds for a search, not layouts.
const MOST_VOTERS: usize = 255;
