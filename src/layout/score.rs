//! The array's vote and weighted counts of it, fast.
//!
//! Planes are read in blocks of `BLOCK` words. A block of bit-sliced counters stays in the first
//! cache, and loops over its lanes have fixed length, so the compiler turns them into vector
//! instructions. Counts by word are exact; rates are summed in the order of words.

use super::condition::Condition;
use super::cost::Tariff;
use super::events::Planes;

/// Words treated together.
const BLOCK: usize = 64;
/// Digits of the bit-sliced counters: up to 255 telescopes.
const DIGITS: usize = 8;

type Lanes = [u64; BLOCK];

/// Adds a plane's block into bit-sliced counters that hold up to `2^digits - 1`.
#[inline]
fn add(counter: &mut [Lanes; DIGITS], digits: usize, plane: &Lanes) {
    let mut carry = *plane;
    for digit in &mut counter[..digits] {
        for (lane, bits) in digit.iter_mut().zip(&mut carry) {
            let sum = *lane ^ *bits;
            *bits &= *lane;
            *lane = sum;
        }
    }
}

/// Lanes whose count is at least `least`.
#[inline]
fn not_less(counter: &[Lanes; DIGITS], digits: usize, least: usize) -> Lanes {
    let (mut greater, mut equal) = ([0_u64; BLOCK], [u64::MAX; BLOCK]);
    if least >> digits > 0 {
        return greater;
    }
    for digit in (0..digits).rev() {
        let lanes = greater.iter_mut().zip(&mut equal).zip(&counter[digit]);
        if (least >> digit) & 1 == 1 {
            lanes.for_each(|((_, e), bits)| *e &= bits);
        } else {
            lanes.for_each(|((g, e), bits)| {
                *g |= *e & bits;
                *e &= !bits;
            });
        }
    }
    for (g, e) in greater.iter_mut().zip(&equal) {
        *g |= e;
    }
    greater
}

#[inline]
fn block(plane: &[u64], start: usize) -> Lanes {
    let mut lanes = [0; BLOCK];
    let there = &plane[start..plane.len().min(start + BLOCK)];
    lanes[..there.len()].copy_from_slice(there);
    lanes
}

/// Set bits of each lane by adding neighbours: pairs, fours, bytes, then one multiplication.
///
/// # Source
/// Warren 2013, Hacker's Delight, ch. 5. Written out because the baseline x86-64 has no population
/// count, and because additions run on all lanes at once.
#[inline]
fn ones(bits: u64) -> u64 {
    let pairs = bits - ((bits >> 1) & 0x5555_5555_5555_5555);
    let fours = (pairs & 0x3333_3333_3333_3333) + ((pairs >> 2) & 0x3333_3333_3333_3333);
    let bytes = (fours + (fours >> 4)) & 0x0F0F_0F0F_0F0F_0F0F;
    let sums = bytes + (bytes >> 8);
    let sums = sums + (sums >> 16);
    (sums + (sums >> 32)) & 0x7F
}

/// Sum over lanes of weight x set bits, in sixteen interleaved partial sums of fixed order.
#[inline]
fn weighted(lanes: &Lanes, weights: &[f64]) -> f64 {
    let mut counts = [0.0_f64; BLOCK];
    for (count, bits) in counts.iter_mut().zip(lanes) {
        // Exact: a count below 2^52 in the mantissa of 2^52.
        *count = f64::from_bits(0x4330_0000_0000_0000 | ones(*bits)) - 4_503_599_627_370_496.0;
    }
    if weights.len() < BLOCK {
        return counts.iter().zip(weights).map(|(count, weight)| count * weight).sum();
    }
    let mut sums = [0.0_f64; 16];
    for (counts, weights) in counts.chunks_exact(16).zip(weights.chunks_exact(16)) {
        for ((sum, count), weight) in sums.iter_mut().zip(counts).zip(weights) {
            *sum += count * weight;
        }
    }
    sums.iter().sum()
}

/// The least number of digits that hold a count.
fn digits_of(most: usize) -> usize {
    (usize::BITS - most.leading_zeros()) as usize
}

/// Events of a block that the members' votes keep.
#[inline]
fn kept(columns: &[&[u64]], kinds: &[usize], condition: &Condition, start: usize) -> Lanes {
    let digits = digits_of(columns.len());
    let mut out = [u64::MAX; BLOCK];
    for clause in &condition.clauses {
        let mut counter = [[0_u64; BLOCK]; DIGITS];
        let mut added = 0_usize;
        for (column, _) in columns.iter().zip(kinds).filter(|(_, kind)| clause.counts(**kind)) {
            added += 1;
            add(&mut counter, digits_of(added), &block(column, start));
        }
        let passed = not_less(&counter, digits, clause.least);
        out.iter_mut().zip(&passed).for_each(|(all, lane)| *all &= lane);
    }
    out
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
    assert!(members.len() < 1 << DIGITS, "at most 255 telescopes vote");
    let columns: Vec<&[u64]> = members.iter().map(|&m| planes.columns[m].as_slice()).collect();
    let kinds: Vec<usize> = members.iter().map(|&member| kinds[member]).collect();
    let mut out = Vec::with_capacity(planes.words() + BLOCK);
    for start in (0..planes.words()).step_by(BLOCK) {
        out.extend_from_slice(&kept(&columns, &kinds, condition, start));
    }
    out.truncate(planes.words());
    out
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
    assert!(members.len() < 1 << DIGITS, "at most 255 telescopes vote");
    let columns: Vec<&[u64]> = members.iter().map(|&m| planes.columns[m].as_slice()).collect();
    let kinds: Vec<usize> = members.iter().map(|&member| kinds[member]).collect();
    let weights = &planes.weights[spectrum];
    let blocks = (0..planes.words()).step_by(BLOCK).map(|start| {
        let end = weights.len().min(start + BLOCK);
        weighted(&kept(&columns, &kinds, condition, start), &weights[start..end])
    });
    blocks.sum()
}

/// What each word adds to a layout's rate, Hz.
pub fn word_rates(planes: &Planes, spectrum: usize, kept: &[u64]) -> Vec<f64> {
    let weights = &planes.weights[spectrum];
    kept.iter().zip(weights).map(|(bits, weight)| ones(*bits) as f64 * weight).collect()
}

/// The vote of a layout with one place open: the rate with any column there is one pass over that
/// column, since a clause holds if it holds already or lacks one vote and the newcomer gives it.
pub(super) struct Opening {
    /// By clause: kept without the newcomer; kept with its vote.
    clauses: Vec<(Vec<u64>, Vec<u64>)>,
}

impl Opening {
    pub fn new(planes: &Planes, others: &[usize], kinds: &[usize], condition: &Condition) -> Self {
        let of = |clause: &super::Clause, less: usize| {
            let clause = super::Clause { kinds: clause.kinds.clone(), least: clause.least - less };
            vote(planes, others, kinds, &Condition { clauses: vec![clause] })
        };
        let clauses = condition.clauses.iter().map(|clause| (of(clause, 0), of(clause, 1)));
        Self { clauses: clauses.collect() }
    }

    /// Rate with a column in the open place, Hz.
    pub fn rate_hz(
        &self,
        planes: &Planes,
        spectrum: usize,
        column: usize,
        kind: usize,
        condition: &Condition,
    ) -> f64 {
        let weights = &planes.weights[spectrum];
        let blocks = (0..planes.words()).step_by(BLOCK).map(|start| {
            let end = weights.len().min(start + BLOCK);
            let newcomer = block(&planes.columns[column], start);
            let mut out = [u64::MAX; BLOCK];
            for (clause, (without, with)) in condition.clauses.iter().zip(&self.clauses) {
                let already = block(without, start);
                if clause.counts(kind) {
                    let short = block(with, start);
                    for lane in 0..BLOCK {
                        out[lane] &= already[lane] | (short[lane] & newcomer[lane]);
                    }
                } else {
                    out.iter_mut().zip(&already).for_each(|(all, lane)| *all &= lane);
                }
            }
            weighted(&out, &weights[start..end])
        });
        blocks.sum()
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
