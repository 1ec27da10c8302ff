//! The whole table, and how it is put together from parts.

use std::collections::BTreeMap;

use super::EVENTS_PER_WORD;
use super::error::TableError;
use super::image::CellImage;
use super::pad::PadKey;
use super::sample::Sample;
use super::throw::species_key;

/// Where a table comes from.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct TableStamp {
    /// Checksum of the study file; kept for the reader, not compared.
    pub study_checksum: String,
    /// Checksum of everything that decides what a cell holds (site, air, sky, kinds, pointing,
    /// engine, throws), and of nothing else: a table is used again as long as this is the same.
    pub upstream_checksum: String,
    /// Seed of the random streams.
    pub seed: u64,
}

/// The table of one node of zenith, azimuth, offset and sky.
#[derive(Clone, Debug, PartialEq)]
pub struct ResponseTable {
    /// Where it comes from.
    pub stamp: TableStamp,
    /// A whole sample for each primary, in order of [`species_key`].
    pub samples: Vec<Sample>,
}

/// Puts parts together, in whatever order they come.
///
/// A part is a [`Sample`] of some words and some pads. The result does not depend on how the words
/// and pads were cut into parts: words in order of their number, pads in order of their key.
#[derive(Clone, Debug, Default)]
pub struct TableBuilder {
    parts: BTreeMap<u64, Vec<Sample>>,
}

impl TableBuilder {
    /// A builder without parts.
    pub fn new() -> Self {
        Self::default()
    }

    /// Adds a part.
    pub fn insert(&mut self, part: Sample) {
        self.parts.entry(species_key(part.species)).or_default().push(part);
    }

    /// The whole table.
    ///
    /// # Errors
    /// [`TableError::Parts`] if parts of one primary were thrown differently, overlap, leave gaps,
    /// or do not make whole repetitions of the throw.
    pub fn finish(self, stamp: TableStamp) -> Result<ResponseTable, TableError> {
        let samples = self.parts.into_values().map(whole).collect::<Result<_, _>>()?;
        Ok(ResponseTable { stamp, samples })
    }
}

fn misfit(part: &Sample, what: String) -> TableError {
    TableError::Parts { species: part.species.to_string(), what }
}

/// One sample from its parts: by pads within a range of words first, then by words.
fn whole(mut parts: Vec<Sample>) -> Result<Sample, TableError> {
    parts.sort_by_key(|part| (part.first_word, part.words.len()));
    let mut ranges: Vec<Sample> = Vec::new();
    for part in parts {
        match ranges.last_mut() {
            Some(last) if last.throw != part.throw => {
                return Err(misfit(&part, "they were thrown differently".into()));
            }
            Some(last)
                if last.first_word == part.first_word && last.words.len() == part.words.len() =>
            {
                add_pads(last, part)?;
            }
            _ => ranges.push(part),
        }
    }
    let mut ranges = ranges.into_iter().map(sorted);
    let mut sample = ranges.next().ok_or_else(|| TableError::Parts {
        species: "nameless".into(),
        what: "there are none".into(),
    })??;
    for range in ranges {
        add_words(&mut sample, range?)?;
    }
    let (words, once) = (sample.words.len(), sample.throw.word_count());
    if sample.first_word != 0 || words == 0 || words % once != 0 {
        let first = sample.first_word;
        let what = format!("words {first} to {} are not whole sets of {once}", first + words);
        return Err(misfit(&sample, what));
    }
    let repetitions = (words / once) as f64;
    for (number, word) in sample.words.iter_mut().enumerate() {
        word.exposure = sample.throw.word(number).exposure / repetitions;
    }
    Ok(sample)
}

/// Adds the columns of a part of the same words.
fn add_pads(sample: &mut Sample, part: Sample) -> Result<(), TableError> {
    let same =
        |(a, b): (&super::Word, &super::Word)| a.energy_gev == b.energy_gev && a.ring == b.ring;
    if !sample.words.iter().zip(&part.words).all(same) {
        return Err(misfit(&part, "words of one number differ".into()));
    }
    sample.pads.extend(part.pads);
    sample.margins.extend(part.margins);
    sample.images.extend(part.images);
    Ok(())
}

/// The same sample with its columns in order of their keys.
fn sorted(sample: Sample) -> Result<Sample, TableError> {
    let mut order: Vec<usize> = (0..sample.pads.len()).collect();
    order.sort_by(|&a, &b| sample.pads[a].cmp(&sample.pads[b]));
    let pads: Vec<PadKey> = order.iter().map(|&at| sample.pads[at].clone()).collect();
    if let Some(pair) = pads.windows(2).find(|pair| pair[0] == pair[1]) {
        return Err(misfit(&sample, format!("pad {:?} comes twice", pair[0])));
    }
    let Sample { mut margins, mut images, species, throw, first_word, words, .. } = sample;
    let margins = order.iter().map(|&at| core::mem::take(&mut margins[at])).collect();
    let images = order.iter().map(|&at| core::mem::take(&mut images[at])).collect();
    Ok(Sample { species, throw, first_word, words, pads, margins, images })
}

/// Adds the words of a part of the same pads.
fn add_words(sample: &mut Sample, part: Sample) -> Result<(), TableError> {
    let next = sample.first_word + sample.words.len();
    if part.first_word != next {
        let what = format!("word {next} should follow, not {}", part.first_word);
        return Err(misfit(&part, what));
    }
    if part.pads != sample.pads {
        return Err(misfit(&part, format!("from word {next} on the pads are others")));
    }
    let start = (sample.words.len() * EVENTS_PER_WORD) as u32;
    sample.words.extend(part.words);
    for (column, codes) in sample.margins.iter_mut().zip(part.margins) {
        column.extend(codes);
    }
    for (column, cells) in sample.images.iter_mut().zip(part.images) {
        let shifted = |cell: CellImage| CellImage { event: start + cell.event, ..cell };
        column.extend(cells.into_iter().map(shifted));
    }
    Ok(())
}
