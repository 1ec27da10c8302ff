//! Votes and rates of layouts, and what a search maximises.

use super::condition::Condition;
use super::cost::Tariff;
use super::events::Planes;
use super::lanes::{Tally, common_sum, kept, kept_sum};

/// Events in which at least `least` of the planes fire, one bit an event.
///
/// # Shape
/// All planes have one u64 a word.
///
/// # Panics
/// With more than 255 planes.
pub fn at_least(planes: &[&[u64]], least: usize) -> Vec<u64> {
    let words = planes.first().map_or(0, |plane| plane.len());
    kept(&[Tally { planes: planes.to_vec(), least }], words)
}

/// A tally for each clause of a condition.
fn tallies<'a>(
    planes: &'a Planes,
    members: &[usize],
    kinds: &[usize],
    condition: &Condition,
) -> Vec<Tally<'a>> {
    let of = |clause: &super::Clause| Tally {
        planes: members
            .iter()
            .filter(|&&member| clause.counts(kinds[member]))
            .map(|&member| planes.columns[member].as_slice())
            .collect(),
        least: clause.least,
    };
    condition.clauses.iter().map(of).collect()
}

/// Events that a layout keeps, one bit an event.
///
/// # Panics
/// With more than 255 members.
pub fn vote(
    planes: &Planes,
    members: &[usize],
    kinds: &[usize],
    condition: &Condition,
) -> Vec<u64> {
    kept(&tallies(planes, members, kinds, condition), planes.words())
}

/// Trigger rate of a layout for one of the spectra, Hz.
///
/// # Panics
/// With more than 255 members.
pub fn rate_hz(
    planes: &Planes,
    spectrum: usize,
    members: &[usize],
    kinds: &[usize],
    condition: &Condition,
) -> f64 {
    kept_sum(&tallies(planes, members, kinds, condition), &planes.weights[spectrum])
}

/// What each word adds to a layout's rate, Hz.
pub fn word_rates(planes: &Planes, spectrum: usize, kept: &[u64]) -> Vec<f64> {
    let weights = &planes.weights[spectrum];
    kept.iter().zip(weights).map(|(bits, weight)| f64::from(bits.count_ones()) * weight).collect()
}

/// The vote of a layout with one place open: the rate with any column there is one pass over that
/// column, since an event is kept if it is already, or if it lacks only the newcomer's vote.
pub(super) struct Opening<'a> {
    planes: &'a Planes,
    weights: &'a [f64],
    /// Rate without a newcomer, Hz.
    base_hz: f64,
    /// By kind of the newcomer: events that its vote would add.
    gains: Vec<Vec<u64>>,
}

impl<'a> Opening<'a> {
    pub fn new(
        planes: &'a Planes,
        spectrum: usize,
        others: &[usize],
        kinds: &[usize],
        condition: &Condition,
    ) -> Self {
        let weights = &planes.weights[spectrum];
        let already = vote(planes, others, kinds, condition);
        let every = vec![u64::MAX; already.len()];
        let with = |kind: usize| {
            let clauses = condition.clauses.iter().map(|clause| super::Clause {
                kinds: clause.kinds.clone(),
                least: clause.least - usize::from(clause.counts(kind) && clause.least > 0),
            });
            let condition = Condition { clauses: clauses.collect() };
            let with = vote(planes, others, kinds, &condition);
            with.iter().zip(&already).map(|(with, already)| with & !already).collect()
        };
        let most = kinds.iter().copied().max().map_or(0, |kind| kind + 1);
        let base_hz = common_sum(&already, &every, weights);
        Self { planes, weights, base_hz, gains: (0..most).map(with).collect() }
    }

    /// Rate with a column of a kind in the open place, Hz.
    pub fn rate_hz(&self, column: usize, kind: usize) -> f64 {
        self.base_hz + common_sum(&self.planes.columns[column], &self.gains[kind], self.weights)
    }
}

/// What a search maximises.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Objective {
    /// Gamma trigger rate of a spectrum, Hz.
    GammaRate {
        /// Index of the spectrum.
        spectrum: usize,
    },
    /// Gamma rate over the square root of the background rate, Hz^(1/2).
    PerRootBackground {
        /// Index of the spectrum.
        spectrum: usize,
    },
    /// Gamma rate over cost.
    PerCost {
        /// Index of the spectrum.
        spectrum: usize,
    },
}

/// Pads, events and what is asked of a layout.
#[derive(Clone, Debug)]
pub struct Problem {
    /// Position of each column, east, north, up, m.
    pub positions_m: Vec<[f64; 3]>,
    /// Kind of each column.
    pub kinds: Vec<usize>,
    /// Gamma events.
    pub gamma: Planes,
    /// Background events, one set a primary.
    pub backgrounds: Vec<Planes>,
    /// How many telescopes must fire.
    pub condition: Condition,
    /// What is maximised.
    pub objective: Objective,
    /// Prices.
    pub tariff: Tariff,
    /// Least distance of two telescopes on the ground, m; columns on one spot exclude each other
    /// in any case.
    pub least_distance_m: f64,
    /// Most that a layout may cost.
    pub budget: Option<f64>,
}

impl Problem {
    /// The score of a layout.
    pub fn score(&self, members: &[usize]) -> f64 {
        let gamma = |s| rate_hz(&self.gamma, s, members, &self.kinds, &self.condition);
        match self.objective {
            Objective::GammaRate { spectrum } => gamma(spectrum),
            Objective::PerCost { spectrum } => gamma(spectrum) / self.cost(members),
            Objective::PerRootBackground { spectrum } => {
                per_root(gamma(spectrum), self.background_hz(members))
            }
        }
    }

    /// Background rate of a layout, all primaries, Hz.
    pub fn background_hz(&self, members: &[usize]) -> f64 {
        let rate = |planes| rate_hz(planes, 0, members, &self.kinds, &self.condition);
        self.backgrounds.iter().map(rate).sum()
    }

    /// Cost of a layout.
    pub fn cost(&self, members: &[usize]) -> f64 {
        let placed: Vec<_> =
            members.iter().map(|&m| (self.positions_m[m], self.kinds[m])).collect();
        self.tariff.cost(&placed)
    }

    /// Whether two columns can both be built.
    pub fn compatible(&self, first: usize, second: usize) -> bool {
        let (a, b) = (self.positions_m[first], self.positions_m[second]);
        let distance_m = (a[0] - b[0]).hypot(a[1] - b[1]);
        first != second && distance_m >= self.least_distance_m.max(1e-3)
    }

    /// Whether a layout is within the budget.
    pub fn affordable(&self, members: &[usize]) -> bool {
        self.budget.is_none_or(|budget| self.cost(members) <= budget)
    }
}

/// Gamma rate over the root of the background rate; nothing if no gamma event is kept.
pub(super) fn per_root(gamma_hz: f64, background_hz: f64) -> f64 {
    if gamma_hz > 0.0 { gamma_hz / background_hz.sqrt() } else { 0.0 }
}
