//! The array's vote and weighted counts of it, sixty-four events a word, in vector registers.
//!
//! Planes are read in blocks of `BLOCK` words. Loops over the lanes of a block have fixed length,
//! so the compiler turns them into vector instructions; `pulp` picks the widest that the processor
//! has at run time. Counts are exact and sums have a fixed order: the same bits on any processor.

use pulp::{Arch, Simd, WithSimd};

/// Words treated together.
const BLOCK: usize = 32;
/// Digits of the bit-sliced counters: up to 255 telescopes.
const DIGITS: usize = 8;

type Lanes = [u64; BLOCK];

/// Telescopes of which at least some must fire.
pub(super) struct Tally<'a> {
    /// Their planes.
    pub planes: Vec<&'a [u64]>,
    /// How many must fire.
    pub least: usize,
}

/// Events that pass all tallies, one bit an event.
///
/// # Panics
/// With more than 255 planes in a tally.
pub(super) fn kept(tallies: &[Tally<'_>], words: usize) -> Vec<u64> {
    assert!(tallies.iter().all(|tally| tally.planes.len() < 1 << DIGITS), "at most 255 vote");
    Arch::new().dispatch(Kept { tallies, words })
}

/// Sum over words of weight x events that pass all tallies.
///
/// # Panics
/// With more than 255 planes in a tally.
pub(super) fn kept_sum(tallies: &[Tally<'_>], weights: &[f64]) -> f64 {
    assert!(tallies.iter().all(|tally| tally.planes.len() < 1 << DIGITS), "at most 255 vote");
    Arch::new().dispatch(KeptSum { tallies, weights })
}

/// Sum over words of weight x events that are in both planes.
pub(super) fn common_sum(first: &[u64], second: &[u64], weights: &[f64]) -> f64 {
    Arch::new().dispatch(CommonSum { first, second, weights })
}

struct Kept<'a, 'b> {
    tallies: &'a [Tally<'b>],
    words: usize,
}

impl WithSimd for Kept<'_, '_> {
    type Output = Vec<u64>;

    #[inline(always)]
    fn with_simd<S: Simd>(self, _: S) -> Vec<u64> {
        let mut out = Vec::with_capacity(self.words + BLOCK);
        for start in (0..self.words).step_by(BLOCK) {
            out.extend_from_slice(&passing(self.tallies, start));
        }
        out.truncate(self.words);
        out
    }
}

struct KeptSum<'a, 'b> {
    tallies: &'a [Tally<'b>],
    weights: &'a [f64],
}

impl WithSimd for KeptSum<'_, '_> {
    type Output = f64;

    #[inline(always)]
    fn with_simd<S: Simd>(self, _: S) -> f64 {
        let mut sums = [0.0; LANES];
        let mut tail = 0.0;
        for start in (0..self.weights.len()).step_by(BLOCK) {
            let lanes = passing(self.tallies, start);
            add_weighted(&lanes, &self.weights[start..], &mut sums, &mut tail);
        }
        sums.iter().sum::<f64>() + tail
    }
}

struct CommonSum<'a> {
    first: &'a [u64],
    second: &'a [u64],
    weights: &'a [f64],
}

impl WithSimd for CommonSum<'_> {
    type Output = f64;

    #[inline(always)]
    fn with_simd<S: Simd>(self, _: S) -> f64 {
        let mut sums = [0.0; LANES];
        let mut tail = 0.0;
        for start in (0..self.weights.len()).step_by(BLOCK) {
            let mut lanes = block(self.first, start);
            let others = block(self.second, start);
            for (lane, other) in lanes.iter_mut().zip(&others) {
                *lane &= other;
            }
            add_weighted(&lanes, &self.weights[start..], &mut sums, &mut tail);
        }
        sums.iter().sum::<f64>() + tail
    }
}

/// Partial sums that run side by side.
const LANES: usize = 16;

/// Adds weight x set bits to interleaved partial sums; words after the last whole block to `tail`.
#[inline(always)]
fn add_weighted(lanes: &Lanes, weights: &[f64], sums: &mut [f64; LANES], tail: &mut f64) {
    let mut counts = [0.0_f64; BLOCK];
    for (count, bits) in counts.iter_mut().zip(lanes) {
        // Exact: a count below 2^52 in the mantissa of 2^52.
        let bits = 0x4330_0000_0000_0000 | u64::from(bits.count_ones());
        *count = f64::from_bits(bits) - 4_503_599_627_370_496.0;
    }
    let Some(weights) = weights.first_chunk::<BLOCK>() else {
        *tail += counts.iter().zip(weights).map(|(count, weight)| count * weight).sum::<f64>();
        return;
    };
    for (counts, weights) in counts.chunks_exact(LANES).zip(weights.chunks_exact(LANES)) {
        for ((sum, count), weight) in sums.iter_mut().zip(counts).zip(weights) {
            *sum += count * weight;
        }
    }
}

#[inline(always)]
fn block(plane: &[u64], start: usize) -> Lanes {
    if let Some(lanes) = plane[start..].first_chunk::<BLOCK>() {
        return *lanes;
    }
    let mut lanes = [0; BLOCK];
    let rest = &plane[start..];
    lanes[..rest.len()].copy_from_slice(rest);
    lanes
}

/// Events of a block that pass all tallies.
#[inline(always)]
fn passing(tallies: &[Tally<'_>], start: usize) -> Lanes {
    let mut out = [u64::MAX; BLOCK];
    for tally in tallies {
        let passed = match tally.least {
            0 => continue,
            1 => by_levels::<1>(&tally.planes, start),
            2 => by_levels::<2>(&tally.planes, start),
            3 => by_levels::<3>(&tally.planes, start),
            _ => by_digits(&tally.planes, tally.least, start),
        };
        out.iter_mut().zip(&passed).for_each(|(all, lane)| *all &= lane);
    }
    out
}

/// Events of a block in which at least `LEAST` planes fire: a level for each count up to it.
#[inline(always)]
fn by_levels<const LEAST: usize>(planes: &[&[u64]], start: usize) -> Lanes {
    let mut levels = [[0_u64; BLOCK]; LEAST];
    for plane in planes {
        let mut rising = block(plane, start);
        for level in &mut levels {
            for (lane, bits) in level.iter_mut().zip(&mut rising) {
                let both = *lane & *bits;
                *lane |= *bits;
                *bits = both;
            }
        }
    }
    levels[LEAST - 1]
}

/// The same for any number, in bit-sliced counters: adding a plane is a ripple of half-adders,
/// comparing one pass from the highest digit.
#[inline(always)]
fn by_digits(planes: &[&[u64]], least: usize, start: usize) -> Lanes {
    let digits_of = |most: usize| (usize::BITS - most.leading_zeros()) as usize;
    let mut counter = [[0_u64; BLOCK]; DIGITS];
    for (index, plane) in planes.iter().enumerate() {
        let mut carry = block(plane, start);
        for digit in &mut counter[..digits_of(index + 1)] {
            for (lane, bits) in digit.iter_mut().zip(&mut carry) {
                let sum = *lane ^ *bits;
                *bits &= *lane;
                *lane = sum;
            }
        }
    }
    let (mut greater, mut equal) = ([0_u64; BLOCK], [u64::MAX; BLOCK]);
    let digits = digits_of(planes.len());
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

#[cfg(test)]
mod tests {
    use super::*;
    use crate::numerics::{Stage, Stream};

    #[test]
    fn tallies_are_counts_over_events_and_sums_are_their_weighted_number() {
        let mut stream = Stream::keyed(1, Stage::Search, &[1]);
        // Whole blocks and a rest.
        for words in [20, 64, 71] {
            let planes: Vec<Vec<u64>> =
                (0..11).map(|_| (0..words).map(|_| stream.bits()).collect()).collect();
            let weights: Vec<f64> = (0..words).map(|_| stream.uniform()).collect();
            for least in 0..=12 {
                let planes: Vec<&[u64]> = planes.iter().map(Vec::as_slice).collect();
                let tallies = [Tally { planes: planes.clone(), least }];
                let voted = kept(&tallies, words);
                let mut sum = 0.0;
                for word in 0..words {
                    for event in 0..64 {
                        let count = planes.iter().filter(|p| p[word] >> event & 1 == 1).count();
                        assert_eq!(voted[word] >> event & 1 == 1, count >= least);
                        sum += if count >= least { weights[word] } else { 0.0 };
                    }
                }
                assert!((kept_sum(&tallies, &weights) - sum).abs() <= 1e-11 * sum);
                let every = vec![u64::MAX; words];
                assert!((common_sum(&voted, &every, &weights) - sum).abs() <= 1e-11 * sum);
            }
        }
    }
}
