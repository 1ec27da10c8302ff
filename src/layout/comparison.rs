//! Paired comparison of layouts on common events.

use crate::numerics::{Stage, Stream};

/// Probability of the right order above which two layouts are told apart.
pub const DECISIVE: f64 = 0.95;

/// What is drawn again to learn how far a result could have come out differently.
#[derive(Clone, Debug, PartialEq)]
pub enum Resampling {
    /// Whole showers with replacement; the shower of each word.
    Showers(Vec<u32>),
    /// For words stratified in energy: of each pair of neighbours one counts twice, the other not
    /// at all; the pairs of words (McCarthy 1969, Rev. Int. Stat. Inst. 37, 239, half-samples).
    Pairs(Vec<[u32; 2]>),
}

impl Resampling {
    /// Neighbours in energy within a ring of impact distance, so that strata stay whole.
    ///
    /// # Shape
    /// Ring and energy of each word. The last word of a ring of odd number is left as it is.
    pub fn of_strata(words: impl Iterator<Item = (usize, f64)>) -> Self {
        let mut order: Vec<(usize, f64, u32)> =
            words.zip(0..).map(|((ring, energy), word)| (ring, energy, word)).collect();
        order.sort_by(|a, b| a.0.cmp(&b.0).then(a.1.total_cmp(&b.1)).then(a.2.cmp(&b.2)));
        let rings = order.chunk_by(|a, b| a.0 == b.0);
        let pairs = rings.flat_map(|ring| ring.chunks_exact(2));
        Self::Pairs(pairs.map(|pair| [pair[0].2, pair[1].2]).collect())
    }

    /// How often each word counts in one resample; `words` in all.
    pub fn counts(&self, words: usize, seed: u64, resample: u64) -> Vec<f64> {
        let mut stream = Stream::keyed(seed, Stage::Bootstrap, &[resample]);
        match self {
            Self::Showers(of_word) => {
                let mut names = of_word.clone();
                names.sort_unstable();
                names.dedup();
                let mut times = vec![0.0; names.len()];
                for _ in 0..names.len() {
                    times[(stream.uniform() * names.len() as f64) as usize] += 1.0;
                }
                let place = |shower| names.binary_search(shower).unwrap_or_default();
                of_word.iter().map(|shower| times[place(shower)]).collect()
            }
            Self::Pairs(pairs) => {
                let mut counts = vec![1.0; words];
                for [first, second] in pairs {
                    let twice = if stream.uniform() < 0.5 { 2.0 } else { 0.0 };
                    counts[*first as usize] = twice;
                    counts[*second as usize] = 2.0 - twice;
                }
                counts
            }
        }
    }
}

/// A layout in the order.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Compared {
    /// Index of the layout.
    pub layout: usize,
    /// Its score.
    pub score: f64,
    /// Standard error of the score.
    pub error: f64,
    /// Layouts of one tier cannot be told apart from the first of the tier.
    pub tier: usize,
    /// Score less that of the next in the order.
    pub lead: f64,
    /// Standard error of the lead from pairs of resamples.
    pub lead_error: f64,
    /// What the error would be without common events: the two errors in quadrature.
    pub unpaired_error: f64,
    /// Probability that it is truly ahead of the next.
    pub order_probability: f64,
    /// How many times as many showers would put the lead at 1.645 standard errors (a probability
    /// of 95 %): (1.645 lead_error / lead)^2; below one it is there already.
    pub showers_factor: f64,
}

/// Layouts scored again on the same resamples.
#[derive(Clone, Debug, PartialEq)]
pub struct Comparison {
    /// Score of each layout.
    pub scores: Vec<f64>,
    /// `resampled[layout][resample]`.
    pub resampled: Vec<Vec<f64>>,
}

impl Comparison {
    /// Sums what each word adds to each layout's rate over common resamples.
    ///
    /// All layouts saw the same words, so differences are resampled in pairs.
    ///
    /// # Source
    /// Efron 1979, Ann. Stat. 7, 1; common random numbers as in any text on simulation. Test:
    /// `verify_intervals_cover_the_truth_search_winners_included`.
    ///
    /// # Shape
    /// `word_rates[layout][word]`.
    pub fn of_rates(
        word_rates: &[Vec<f64>],
        resampling: &Resampling,
        resamples: usize,
        seed: u64,
    ) -> Self {
        let words = word_rates.first().map_or(0, Vec::len);
        let mut resampled = vec![Vec::with_capacity(resamples); word_rates.len()];
        for resample in 0..resamples as u64 {
            let counts = resampling.counts(words, seed, resample);
            for (rates, draws) in word_rates.iter().zip(&mut resampled) {
                draws.push(rates.iter().zip(&counts).map(|(rate, count)| rate * count).sum());
            }
        }
        let scores = word_rates.iter().map(|rates| rates.iter().sum()).collect();
        Self { scores, resampled }
    }

    /// Numbers without an error, as scores of the same resamples.
    pub fn constant(&self, scores: Vec<f64>) -> Self {
        let count = self.resampled.first().map_or(0, Vec::len);
        let resampled = scores.iter().map(|&score| vec![score; count]).collect();
        Self { scores, resampled }
    }

    /// A score made of several rates, resample by resample: gamma over root background, or over
    /// cost. `other` must have been resampled with its own seed if its showers are others.
    pub fn combined(&self, other: &Self, score: impl Fn(f64, f64) -> f64) -> Self {
        let pair = |a: &[f64], b: &[f64]| -> Vec<f64> {
            a.iter().zip(b).map(|(a, b)| score(*a, *b)).collect()
        };
        let resampled = self.resampled.iter().zip(&other.resampled);
        Self {
            scores: pair(&self.scores, &other.scores),
            resampled: resampled.map(|(a, b)| pair(a, b)).collect(),
        }
    }

    /// Standard error of a score.
    pub fn error(&self, layout: usize) -> f64 {
        deviation(self.resampled[layout].iter().copied())
    }

    /// Standard error of a difference, paired.
    pub fn difference_error(&self, first: usize, second: usize) -> f64 {
        let pairs = self.resampled[first].iter().zip(&self.resampled[second]);
        deviation(pairs.map(|(a, b)| a - b))
    }

    /// Share of resamples in which one layout is ahead of another; ties count half.
    pub fn probability_ahead(&self, first: usize, second: usize) -> f64 {
        let pairs = self.resampled[first].iter().zip(&self.resampled[second]);
        let won: f64 = pairs
            .map(|(a, b)| match a.total_cmp(b) {
                std::cmp::Ordering::Greater => 1.0,
                std::cmp::Ordering::Equal => 0.5,
                std::cmp::Ordering::Less => 0.0,
            })
            .sum();
        won / self.resampled[first].len().max(1) as f64
    }

    /// The order, best first.
    pub fn order(&self) -> Vec<Compared> {
        let mut order: Vec<usize> = (0..self.scores.len()).collect();
        order.sort_by(|&a, &b| self.scores[b].total_cmp(&self.scores[a]).then(a.cmp(&b)));
        let (mut tier, mut leader) = (1, 0);
        let mut compared = Vec::with_capacity(order.len());
        for (place, &layout) in order.iter().enumerate() {
            if self.probability_ahead(order[leader], layout) > DECISIVE && place > 0 {
                tier += 1;
                leader = place;
            }
            compared.push(self.compared(layout, order.get(place + 1).copied(), tier));
        }
        compared
    }

    fn compared(&self, layout: usize, next: Option<usize>, tier: usize) -> Compared {
        let (score, error) = (self.scores[layout], self.error(layout));
        let mut row = Compared {
            layout,
            score,
            error,
            tier,
            lead: f64::NAN,
            lead_error: f64::NAN,
            unpaired_error: f64::NAN,
            order_probability: f64::NAN,
            showers_factor: f64::NAN,
        };
        if let Some(next) = next {
            row.lead = score - self.scores[next];
            row.lead_error = self.difference_error(layout, next);
            row.unpaired_error = error.hypot(self.error(next));
            row.order_probability = self.probability_ahead(layout, next);
            row.showers_factor = (1.645 * row.lead_error / row.lead).powi(2);
        }
        row
    }
}

fn deviation(values: impl Iterator<Item = f64> + Clone) -> f64 {
    let count = values.clone().count() as f64;
    let mean = values.clone().sum::<f64>() / count;
    (values.map(|value| (value - mean).powi(2)).sum::<f64>() / (count - 1.0)).sqrt()
}

/// Whether an order survives a change of assumptions.
#[derive(Clone, Debug, PartialEq)]
pub struct Robustness {
    /// Kendall's rank correlation: 1 the same order, -1 reversed.
    pub kendall_tau: f64,
    /// Pairs of layouts whose order flips, first the one that was ahead.
    pub flipped: Vec<(usize, usize)>,
    /// Whether the best layout is another one.
    pub best_changes: bool,
}

/// Compares scores of the same layouts under two assumptions (light scale, sky noise, air).
///
/// # Source
/// Kendall 1938, Biometrika 30, 81 (tau; a tie on either side counts for neither order).
pub fn robustness(before: &[f64], after: &[f64]) -> Robustness {
    let (mut balance, mut pairs, mut flipped) = (0_i64, 0_i64, Vec::new());
    for a in 0..before.len() {
        for b in a + 1..before.len() {
            let (was, is) = (before[a] - before[b], after[a] - after[b]);
            pairs += 1;
            if was * is > 0.0 {
                balance += 1;
            } else if was * is < 0.0 {
                balance -= 1;
                flipped.push(if was > 0.0 { (a, b) } else { (b, a) });
            }
        }
    }
    let best = |scores: &[f64]| (0..scores.len()).max_by(|&a, &b| scores[a].total_cmp(&scores[b]));
    Robustness {
        kendall_tau: if pairs == 0 { 1.0 } else { balance as f64 / pairs as f64 },
        flipped,
        best_changes: best(before) != best(after),
    }
}
