//! The events of one primary: words and what every column saw of them.

use std::ops::Range;

use rayon::prelude::*;

use crate::shower::Species;

use super::EVENTS_PER_WORD;
use super::image::CellImage;
use super::margin::{Code, threshold_code};
use super::pad::PadKey;
use super::scene::{Scene, WordCells};
use super::throw::{Throw, Thrown};

/// Sixty-four events of one energy, ring and weight.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Word {
    /// Total energy of the primary, GeV.
    pub energy_gev: f64,
    /// Weight of each event for a flux per GeV (and sr): m2 GeV (sr).
    ///
    /// exposure = ring area x solid angle / (n words of the ring x 64 x pdf(E)), so that the rate
    /// of a flux F(E) is the sum over words of F(E) x exposure x triggered events.
    pub exposure: f64,
    /// Ring of impact distance.
    pub ring: usize,
    /// Greatest angle between its showers and the pointing, rad.
    pub angle_rad: f64,
}

/// Simulated events of one primary: a whole throw, or the part of it that starts at `first_word`.
#[derive(Clone, Debug, PartialEq)]
pub struct Sample {
    /// The primary.
    pub species: Species,
    /// How they were thrown.
    pub throw: Throw,
    /// Number of the first word; zero in a whole sample.
    pub first_word: usize,
    /// The words.
    pub words: Vec<Word>,
    /// What names the columns.
    pub pads: Vec<PadKey>,
    /// Margin codes by column: 64 for each word.
    pub margins: Vec<Vec<Code>>,
    /// Images by column, in order of events; sparse.
    pub images: Vec<Vec<CellImage>>,
}

impl Sample {
    /// Simulates a throw. Words are made in parallel and each from its own streams, so the result
    /// does not depend on the number of threads.
    pub fn simulate(scene: &Scene<'_>, throw: &Throw, tick: &(dyn Fn() + Sync)) -> Self {
        Self::simulate_words(scene, throw, 0..throw.word_count(), tick)
    }

    /// Simulates some words of a throw: a part for a [`TableBuilder`](super::TableBuilder).
    pub fn simulate_words(
        scene: &Scene<'_>,
        throw: &Throw,
        numbers: Range<usize>,
        tick: &(dyn Fn() + Sync),
    ) -> Self {
        let first_word = numbers.start;
        let outcomes: Vec<WordCells> = numbers
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
        Self::of_words(throw, first_word, scene.pads(), outcomes)
    }

    /// Puts words, in order of their number, together.
    pub fn of_words(
        throw: &Throw,
        first_word: usize,
        pads: Vec<PadKey>,
        outcomes: Vec<WordCells>,
    ) -> Self {
        let events = outcomes.len() * EVENTS_PER_WORD;
        let mut margins = vec![Vec::with_capacity(events); pads.len()];
        let mut images = vec![Vec::new(); pads.len()];
        let mut words = Vec::with_capacity(outcomes.len());
        for (place, outcome) in outcomes.into_iter().enumerate() {
            words.push(outcome.word);
            let columns = outcome.codes.chunks_exact(EVENTS_PER_WORD);
            for (column, codes) in margins.iter_mut().zip(columns) {
                column.extend_from_slice(codes);
            }
            let start = (place * EVENTS_PER_WORD) as u32;
            for (column, cells) in images.iter_mut().zip(outcome.images) {
                let shifted = |cell: CellImage| CellImage { event: start + cell.event, ..cell };
                column.extend(cells.into_iter().map(shifted));
            }
        }
        let (species, throw) = (throw.species, throw.clone());
        Self { species, throw, first_word, words, pads, margins, images }
    }

    /// Number of events.
    pub fn events(&self) -> usize {
        self.words.len() * EVENTS_PER_WORD
    }

    /// Whole repetitions of the throw.
    pub fn repetitions(&self) -> usize {
        self.words.len() / self.throw.word_count()
    }

    /// Index of the column of a pad.
    pub fn column(&self, pad: &PadKey) -> Option<usize> {
        self.pads.iter().position(|key| key == pad)
    }

    /// What was thrown for a word: energy, directions and cores of its showers, made again.
    pub fn thrown(&self, word: usize) -> Thrown {
        self.throw.word(self.first_word + word)
    }

    /// The image of a column in an event, if one was kept.
    pub fn image(&self, column: usize, event: usize) -> Option<&CellImage> {
        let cells = &self.images[column];
        let found = cells.binary_search_by_key(&(event as u32), |cell| cell.event);
        found.ok().map(|place| &cells[place])
    }

    /// Cells whose expected light was too little for an image, or that saw none.
    pub fn dark_cells(&self) -> u64 {
        let dark = |events: &Vec<Code>| events.iter().filter(|code| **code == 0).count() as u64;
        self.margins.iter().map(dark).sum()
    }

    /// One bit an event: whether a column fires at a threshold.
    ///
    /// # Shape
    /// One u64 a word; bit i is event i of the word.
    pub fn plane(&self, column: usize, threshold_pe: f64) -> Vec<u64> {
        plane(&self.margins[column], threshold_code(threshold_pe))
    }
}

/// One bit a code: whether it is at least `least`.
pub fn plane(codes: &[Code], least: Code) -> Vec<u64> {
    let words = codes.chunks_exact(EVENTS_PER_WORD);
    words.map(|events| bits(events.try_into().unwrap_or(&[0; EVENTS_PER_WORD]), least)).collect()
}

/// Eight events at a time: the compiler turns the inner loop into vector compares and a movemask.
#[inline]
fn bits(events: &[Code; EVENTS_PER_WORD], least: Code) -> u64 {
    let mut word = 0;
    for (byte, eight) in events.chunks_exact(8).enumerate() {
        let mut flags = 0_u64;
        for (bit, &code) in eight.iter().enumerate() {
            flags |= u64::from(code >= least) << bit;
        }
        word |= flags << (8 * byte);
    }
    word
}
