//! How far from the array cores must be thrown, found by a pilot run.
//!
//! A small throw over wide rings tells where each layout's rate comes from. The thrown radius is the
//! least that leaves less than a hundredth of the layouts' rates outside; the rings inside are those
//! that make the error smallest for equal numbers of showers in each: the variance goes with the sum
//! over rings of area x rate.

use crate::rates::{self, Spectrum, beyond_fraction, ring_rates_hz};
use crate::response::{Sample, Throw};

use super::Planned;

/// Edges of the pilot's rings beyond the outermost telescope, m at zenith.
const PILOT_M: [f64; 7] = [60.0, 140.0, 240.0, 380.0, 600.0, 950.0, 1_500.0];
/// Words in each ring of the pilot, for each hundred words of the throw, and at least.
const PILOT_PERCENT: usize = 15;
const PILOT_LEAST: usize = 10;
/// And at most: enough to choose rings by.
const PILOT_MOST: usize = 64;
/// Share of a rate that may lie beyond the thrown radius.
pub const BEYOND: f64 = 0.01;

/// Index of the hardest gamma-ray spectrum that the thrown area is made for.
const HARDEST_INDEX: f64 = 1.5;

/// Rings fitted to where the triggers come from, and the share of the layouts' rates that the pilot
/// saw beyond the outermost, on average.
pub struct Fit {
    /// Outer radii, m.
    pub rings_m: Vec<f64>,
    /// Share beyond.
    pub beyond: f64,
}

/// The throw of the pilot for a throw repeated `repetitions` times, about telescopes within
/// `extent_m` of its centre.
pub fn pilot(throw: &Throw, repetitions: usize, extent_m: f64) -> Throw {
    let secant = 1.0 / throw.pointing.zenith_rad.cos();
    let rings_m: Vec<f64> = PILOT_M.iter().map(|edge| extent_m + edge * secant).collect();
    let all = throw.word_count() * repetitions;
    let words = (all * PILOT_PERCENT / 100 / rings_m.len()).clamp(PILOT_LEAST, PILOT_MOST);
    Throw { rings_m, words, ..throw.clone() }
}

/// Three rings by a pilot's sample and the planes of the layouts; `None` if nothing triggered.
///
/// The radius must hold for the spectrum and, for gamma rays, for a hard one too: areas at the
/// highest energies must not end at the thrown radius. The rings inside suit the spectrum.
pub fn fit(sample: &Sample, spectrum: &Spectrum, planes: &[Vec<u64>]) -> Option<Fit> {
    let edges = &sample.throw.rings_m;
    let by_ring = |spectrum: &Spectrum| -> Vec<Vec<f64>> {
        let rates = planes.iter().map(|plane| {
            let words = rates::word_rates(&sample.words, plane, spectrum);
            ring_rates_hz(&sample.words, &words, edges.len())
        });
        rates.filter(|rings| rings.iter().sum::<f64>() > 0.0).collect()
    };
    let rates = by_ring(spectrum);
    if rates.is_empty() {
        return None;
    }
    let hard = by_ring(&Spectrum::power_law(1.0, 1.0, HARDEST_INDEX, None));
    let outside = |last: usize| {
        let of = |rates: &[Vec<f64>]| {
            let shares = rates.iter().map(|rings| share_outside(edges, rings, last));
            shares.sum::<f64>() / rates.len() as f64
        };
        let diffuse = sample.throw.cone_rad > 0.0;
        if diffuse { of(&rates) } else { of(&rates).max(of(&hard)) }
    };
    let last = (2..edges.len()).find(|&last| outside(last) < BEYOND).unwrap_or(edges.len() - 1);
    let areas = sample.throw.ring_areas_m2();
    let cost = |from: usize, to: usize| -> f64 {
        let area: f64 = areas[from..to].iter().sum();
        let shares = rates.iter().map(|r| r[from..to].iter().sum::<f64>() / r.iter().sum::<f64>());
        area * shares.sum::<f64>()
    };
    let splits = (1..last).flat_map(|a| (a + 1..=last).map(move |b| (a, b)));
    let total = |&(a, b): &(usize, usize)| cost(0, a) + cost(a, b) + cost(b, last + 1);
    let (first, second) = splits.min_by(|x, y| total(x).total_cmp(&total(y)))?;
    let rings_m = vec![edges[first - 1], edges[second - 1], edges[last]];
    Some(Fit { rings_m, beyond: outside(last) })
}

/// Share of a rate from beyond ring `last`: the pilot's outer rings, and beyond the pilot the
/// exponential continuation.
fn share_outside(edges: &[f64], rings: &[f64], last: usize) -> f64 {
    let total: f64 = rings.iter().sum();
    let farther = beyond_fraction(edges, rings);
    let farther = if farther.is_finite() { farther } else { 0.0 };
    rings[last + 1..].iter().sum::<f64>() / total + farther
}

impl Planned<'_> {
    /// What the reader must know of the throw: cores beyond the thrown radius.
    pub(super) fn reach_note(&self, place: usize) -> String {
        let weighted = if place == 0 { &self.gamma } else { &self.backgrounds[place - 1] };
        let throw = &weighted.sample.throw;
        let radius = throw.rings_m.last().copied().unwrap_or(0.0);
        let beyond = self.beyond[place];
        let name = weighted.sample.species;
        if beyond.is_nan() {
            format!("{name}: cores thrown to {radius:.0} m, as the study asks")
        } else {
            format!(
                "{name}: cores thrown to {radius:.0} m; a pilot run saw {:.1} % of the layouts' rates beyond",
                100.0 * beyond
            )
        }
    }
}
