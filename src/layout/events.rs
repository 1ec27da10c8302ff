//! Bit planes with weights: all that scoring needs to know of a simulation.

/// The events of one primary as every column saw them, at chosen thresholds.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Planes {
    /// One bit an event, one u64 a word: `columns[column][word]`.
    pub columns: Vec<Vec<u64>>,
    /// Rate of one event of a word, Hz, for each spectrum: `weights[spectrum][word]`.
    pub weights: Vec<Vec<f64>>,
    /// Which shower, or group of showers, a word belongs to; words of one shower are resampled
    /// together.
    pub showers: Vec<u32>,
}

impl Planes {
    /// Number of words.
    pub fn words(&self) -> usize {
        self.showers.len()
    }

    /// Words of the showers of even (0) or odd (1) number, with weights scaled so that the rates
    /// are still those of the whole.
    ///
    /// The two halves are independent: search on one, report from the other.
    pub fn half(&self, parity: u32) -> Self {
        let kept: Vec<usize> =
            (0..self.words()).filter(|&word| self.showers[word] % 2 == parity % 2).collect();
        let scale = self.words() as f64 / kept.len().max(1) as f64;
        let take = |plane: &Vec<u64>| kept.iter().map(|&word| plane[word]).collect();
        let scaled = |rates: &Vec<f64>| kept.iter().map(|&word| scale * rates[word]).collect();
        Self {
            columns: self.columns.iter().map(take).collect(),
            weights: self.weights.iter().map(scaled).collect(),
            showers: kept.iter().map(|&word| self.showers[word]).collect(),
        }
    }
}
