//! An order between layouts that admits ties.

use crate::numerics::{Stage, Stream};

/// A layout in the order.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Ranked {
    /// Index of the layout.
    pub layout: usize,
    /// Score: the sum over words.
    pub score: f64,
    /// Tier: layouts of one tier cannot be told apart from the first of the tier.
    pub tier: usize,
    /// Probability that it is truly ahead of the next in the order.
    pub order_probability: f64,
}

/// Probability of the right order above which two layouts are told apart.
pub const DECISIVE: f64 = 0.95;

/// Ranks layouts by the sum of what each word adds to their score.
///
/// All layouts are scored on the same words, so differences are resampled in pairs: each of
/// `resamples` bootstrap draws takes words with replacement, the same for every layout. A new tier
/// begins where a layout is behind the first of the tier with probability above [`DECISIVE`].
///
/// # Shape
/// `word_scores[layout][word]`; all layouts have the same number of words.
///
/// # Source
/// Efron 1979, Ann. Stat. 7, 1; common random numbers as in any text on simulation.
pub fn rank(word_scores: &[Vec<f64>], resamples: usize, seed: u64) -> Vec<Ranked> {
    let mut order: Vec<usize> = (0..word_scores.len()).collect();
    let score = |layout: usize| word_scores[layout].iter().sum::<f64>();
    order.sort_by(|&a, &b| score(b).total_cmp(&score(a)).then(a.cmp(&b)));
    let words = word_scores.first().map_or(0, Vec::len);
    let mut draws: Vec<Vec<f64>> = vec![Vec::with_capacity(resamples); order.len()];
    let mut counts = vec![0_u32; words];
    for resample in 0..resamples {
        let mut stream = Stream::keyed(seed, Stage::Bootstrap, &[resample as u64]);
        counts.fill(0);
        for _ in 0..words {
            counts[(stream.uniform() * words as f64) as usize] += 1;
        }
        for (draws, &layout) in draws.iter_mut().zip(&order) {
            let scores = counts.iter().zip(&word_scores[layout]);
            draws.push(scores.map(|(&n, score)| f64::from(n) * score).sum());
        }
    }
    let ahead = |first: usize, second: usize| {
        let pairs = draws[first].iter().zip(&draws[second]);
        let won: f64 = pairs
            .map(|(a, b)| {
                if a > b {
                    1.0
                } else if a == b {
                    0.5
                } else {
                    0.0
                }
            })
            .sum();
        won / resamples.max(1) as f64
    };
    let (mut tier, mut leader) = (1, 0);
    let mut ranked = Vec::with_capacity(order.len());
    for (place, &layout) in order.iter().enumerate() {
        if place > 0 && ahead(leader, place) > DECISIVE {
            tier += 1;
            leader = place;
        }
        let order_probability =
            if place + 1 < order.len() { ahead(place, place + 1) } else { f64::NAN };
        ranked.push(Ranked { layout, score: score(layout), tier, order_probability });
    }
    ranked
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn equal_layouts_share_a_tier_and_a_common_fluctuation_cancels() {
        let mut stream = Stream::keyed(2, Stage::Search, &[1]);
        let base: Vec<f64> = (0..500).map(|_| stream.exponential()).collect();
        // Two per cent better on every word: unpaired errors are 4.5 %, paired ones vanish.
        let better: Vec<f64> = base.iter().map(|x| 1.02 * x).collect();
        let ranked = rank(&[base.clone(), better, base], 200, 1);
        assert_eq!(ranked[0].layout, 1);
        assert_eq!((ranked[0].tier, ranked[1].tier, ranked[2].tier), (1, 2, 2));
        assert!((ranked[1].order_probability - 0.5).abs() < 1e-12);
    }
}
