//! The events of one primary: words and the margin of every column.

use rayon::prelude::*;

use crate::shower::Species;

use super::EVENTS_PER_WORD;
use super::margin::{Code, threshold_code};
use super::scene::Scene;
use super::throw::Throw;

/// Sixty-four events of one energy, ring and weight.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Word {
    /// Total energy of the primary, GeV.
    pub energy_gev: f64,
    /// Weight of each event for a flux per GeV (and sr): m2 GeV (sr).
    pub exposure: f64,
    /// Ring of impact distance.
    pub ring: usize,
    /// Greatest angle between its showers and the pointing, rad.
    pub angle_rad: f64,
}

/// All simulated events of one primary.
#[derive(Clone, Debug)]
pub struct Sample {
    /// The primary.
    pub species: Species,
    /// How they were thrown.
    pub throw: Throw,
    /// The words.
    pub words: Vec<Word>,
    /// Margin codes by column: 64 for each word.
    pub margins: Vec<Vec<Code>>,
}

impl Sample {
    /// Simulates a throw. Words are made in parallel and each from its own streams, so the result
    /// does not depend on the number of threads.
    pub fn simulate(scene: &Scene<'_>, throw: &Throw, tick: &(dyn Fn() + Sync)) -> Self {
        let outcomes: Vec<(Word, Vec<Code>)> = (0..throw.word_count())
            .into_par_iter()
            .map_init(
                || scene.bench(),
                |bench, number| {
                    let outcome = scene.word(throw, number, bench);
                    tick();
                    outcome
                },
            )
            .collect();
        let columns = scene.columns.len();
        let mut margins = vec![Vec::with_capacity(outcomes.len() * EVENTS_PER_WORD); columns];
        for (_, codes) in &outcomes {
            for (column, events) in margins.iter_mut().zip(codes.chunks_exact(EVENTS_PER_WORD)) {
                column.extend_from_slice(events);
            }
        }
        let words = outcomes.into_iter().map(|(word, _)| word).collect();
        Self { species: throw.species, throw: throw.clone(), words, margins }
    }

    /// Number of events.
    pub fn events(&self) -> usize {
        self.words.len() * EVENTS_PER_WORD
    }

    /// One bit an event: whether a column fires at a threshold.
    pub fn plane(&self, column: usize, threshold_pe: f64) -> Vec<u64> {
        let least = threshold_code(threshold_pe);
        self.margins[column]
            .chunks_exact(EVENTS_PER_WORD)
            .map(|events| {
                events
                    .iter()
                    .enumerate()
                    .fold(0, |word, (event, &code)| word | (u64::from(code >= least) << event))
            })
            .collect()
    }
}
