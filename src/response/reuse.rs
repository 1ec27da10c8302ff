//! A table used again: what is there is read, what is missing is simulated and added.

use std::path::Path;

use super::error::TableError;
use super::sample::Sample;
use super::scene::Scene;
use super::store;
use super::table::{ResponseTable, TableBuilder, TableStamp};
use super::throw::Throw;

/// The samples of some throws, each repeated a number of times, on all columns of a scene, from the
/// table in a folder as far as it goes. Missing pads, repetitions and primaries are simulated, and
/// the table on disk is extended by them. A sample that was thrown otherwise is made again.
///
/// The result is the same, bit for bit, whatever the folder held; `tick` is called once for each
/// word that had to be simulated (twice if a word is seen by pads new and old).
///
/// # Shape
/// A sample for each throw, in their order; columns in the order of the scene.
///
/// # Errors
/// [`TableError`]: a table that is damaged, foreign or outdated is refused, not replaced; remove it,
/// or ask [`store::write`] to, if a rebuild is wanted.
pub fn samples(
    folder: &Path,
    stamp: &TableStamp,
    scene: &Scene<'_>,
    throws: &[(Throw, usize)],
    tick: &(dyn Fn() + Sync),
) -> Result<Vec<Sample>, TableError> {
    let older = match store::read(folder, Some(stamp)) {
        Ok(table) => table.samples,
        Err(TableError::Missing { .. }) => Vec::new(),
        Err(error) => return Err(error),
    };
    let fits = |sample: &Sample| {
        throws.iter().any(|(throw, _)| throw.species == sample.species && *throw == sample.throw)
    };
    let asked = |sample: &Sample| throws.iter().any(|(throw, _)| throw.species == sample.species);
    let replaced = older.iter().any(|sample| asked(sample) && !fits(sample));
    let kept: Vec<Sample> =
        older.into_iter().filter(|sample| fits(sample) || !asked(sample)).collect();
    let mut added = Vec::new();
    for (throw, repetitions) in throws {
        let known = kept.iter().find(|sample| sample.throw == *throw);
        added.extend(missing(scene, throw, *repetitions, known, tick));
    }
    let mut builder = TableBuilder::new();
    added.iter().cloned().chain(kept).for_each(|part| builder.insert(part));
    let table = builder.finish(stamp.clone())?;
    if replaced {
        store::write(folder, &table)?;
    } else if !added.is_empty() {
        store::extend(folder, stamp, &added)?;
    }
    throws.iter().map(|(throw, repetitions)| select(&table, scene, throw, *repetitions)).collect()
}

/// Parts that a sample lacks: new pads over its words, then new words over all pads it will have.
fn missing(
    scene: &Scene<'_>,
    throw: &Throw,
    repetitions: usize,
    known: Option<&Sample>,
    tick: &(dyn Fn() + Sync),
) -> Vec<Sample> {
    let (mut parts, mut scene) = (Vec::new(), scene.with_columns(scene.columns.clone()));
    let end = throw.word_count() * repetitions;
    let first = known.map_or(0, |sample| sample.words.len());
    if let Some(sample) = known {
        let new =
            scene.columns.iter().zip(scene.pads()).filter(|(_, pad)| sample.column(pad).is_none());
        let new = scene.with_columns(new.map(|(column, _)| column.clone()).collect());
        if !new.columns.is_empty() {
            parts.push(Sample::simulate_words(&new, throw, 0..first, tick));
        }
        // Words to come must be seen by the pads that only the table knows, too.
        let here = scene.pads();
        let only_there = sample.pads.iter().filter(|pad| !here.contains(pad));
        let more = only_there.filter_map(|pad| scene.column_of(pad)).collect::<Vec<_>>();
        scene.columns.extend(more);
    }
    if first < end {
        parts.push(Sample::simulate_words(&scene, throw, first..end, tick));
    }
    parts
}

/// The columns and words asked for, with the exposures of that many repetitions.
fn select(
    table: &ResponseTable,
    scene: &Scene<'_>,
    throw: &Throw,
    repetitions: usize,
) -> Result<Sample, TableError> {
    let lacks = |what: String| TableError::Parts { species: throw.species.to_string(), what };
    let sample = table
        .samples
        .iter()
        .find(|sample| sample.throw == *throw)
        .ok_or_else(|| lacks("there are none".into()))?;
    let pads = scene.pads();
    let places: Vec<usize> = pads
        .iter()
        .map(|pad| sample.column(pad).ok_or_else(|| lacks(format!("no column {pad:?}"))))
        .collect::<Result<_, _>>()?;
    let count = throw.word_count() * repetitions;
    let events = count * super::EVENTS_PER_WORD;
    let mut words = sample.words[..count].to_vec();
    for (number, word) in words.iter_mut().enumerate() {
        word.exposure = throw.word(number).exposure / repetitions as f64;
    }
    let images = places.iter().map(|&at| {
        let cells = &sample.images[at];
        cells[..cells.partition_point(|cell| (cell.event as usize) < events)].to_vec()
    });
    Ok(Sample {
        species: throw.species,
        throw: throw.clone(),
        first_word: 0,
        words,
        images: images.collect(),
        margins: places.iter().map(|&at| sample.margins[at][..events].to_vec()).collect(),
        pads,
    })
}
