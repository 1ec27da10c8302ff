//! A table used again: what is there is read, what is missing is simulated and added.

use std::path::Path;

use super::error::TableError;
use super::pad::PadKey;
use super::sample::Sample;
use super::scene::{Column, Scene};
use super::store;
use super::table::{ResponseTable, TableBuilder, TableStamp};
use super::throw::Throw;

/// The samples of some throws, each repeated a number of times, on all columns of a scene, from the
/// table in a folder as far as it goes. Missing pads, repetitions and primaries are simulated, and
/// the table on disk is extended by them. A sample that was thrown otherwise is made again.
///
/// Before a stored sample is used, its first word is simulated again and compared, so that a table
/// made by other physics under the same version number is found out. With `rebuild`, what is there
/// is not read but replaced.
///
/// The result is the same, bit for bit, whatever the folder held; `tick` is called once for each
/// word that had to be simulated (twice if a word is seen by pads new and old).
///
/// # Shape
/// A sample for each throw, in their order; columns in the order of the scene.
///
/// # Errors
/// [`TableError`]: a table that is damaged, foreign or outdated is refused, not replaced.
pub fn samples(
    folder: &Path,
    stamp: &TableStamp,
    scene: &Scene<'_>,
    throws: &[(Throw, usize)],
    rebuild: bool,
    tick: &(dyn Fn() + Sync),
) -> Result<Vec<Sample>, TableError> {
    let older = match store::read(folder, Some(stamp)) {
        _ if rebuild => Vec::new(),
        Ok(table) => table.samples,
        Err(TableError::Missing { .. }) => Vec::new(),
        Err(error) => return Err(error),
    };
    let fits = |sample: &Sample| {
        throws.iter().any(|(throw, _)| throw.species == sample.species && *throw == sample.throw)
    };
    let asked = |sample: &Sample| throws.iter().any(|(throw, _)| throw.species == sample.species);
    for sample in older.iter().filter(|sample| fits(sample)) {
        check_first_word(folder, scene, sample)?;
    }
    let replaced = rebuild || older.iter().any(|sample| asked(sample) && !fits(sample));
    let kept: Vec<Sample> =
        older.into_iter().filter(|sample| fits(sample) || !asked(sample)).collect();
    let fresh = replaced || kept.is_empty();
    let mut added = Vec::new();
    for (throw, repetitions) in throws {
        let known = kept.iter().find(|sample| sample.throw == *throw);
        added.extend(missing(scene, throw, *repetitions, known, tick));
    }
    let mut builder = TableBuilder::new();
    added.iter().cloned().chain(kept).for_each(|part| builder.insert(part));
    let table = builder.finish(stamp.clone())?;
    if fresh {
        store::write(folder, &table)?;
    } else if !added.is_empty() {
        store::extend(folder, stamp, &added)?;
    }
    let pads = scene.pads();
    throws.iter().map(|(throw, repetitions)| select(&table, &pads, throw, *repetitions)).collect()
}

/// The samples of some throws on some pads from a stored table alone; nothing if there is no table
/// or it lacks pads, words or primaries. What is there is not simulated again to compare.
///
/// # Errors
/// [`TableError`]: a table that is damaged, foreign or outdated is refused.
pub fn stored(
    folder: &Path,
    stamp: &TableStamp,
    pads: &[PadKey],
    throws: &[(Throw, usize)],
) -> Result<Option<Vec<Sample>>, TableError> {
    let table = match store::read(folder, Some(stamp)) {
        Ok(table) => table,
        Err(TableError::Missing { .. }) => return Ok(None),
        Err(error) => return Err(error),
    };
    let holds = |(throw, repetitions): &(Throw, usize)| {
        let sample = table.samples.iter().find(|sample| sample.throw == *throw);
        sample.is_some_and(|sample| {
            sample.words.len() >= throw.word_count() * repetitions
                && pads.iter().all(|pad| sample.column(pad).is_some())
        })
    };
    if !throws.iter().all(holds) {
        return Ok(None);
    }
    let found = throws.iter().map(|(throw, times)| select(&table, pads, throw, *times));
    found.collect::<Result<_, _>>().map(Some)
}

/// Simulates the first word of a stored sample again, on the columns that are in both.
fn check_first_word(folder: &Path, scene: &Scene<'_>, sample: &Sample) -> Result<(), TableError> {
    let columns = scene.columns.iter().zip(scene.pads());
    let common: Vec<(&Column, usize)> = columns
        .filter_map(|(column, pad)| sample.column(&pad).map(|place| (column, place)))
        .collect();
    let again = scene.with_columns(common.iter().map(|(column, _)| (*column).clone()).collect());
    let again = Sample::simulate_words(&again, &sample.throw, 0..1, &|| {});
    let same = common.iter().enumerate().all(|(index, &(_, place))| {
        let images = &sample.images[place];
        let of_first =
            images.partition_point(|cell| (cell.event as usize) < super::EVENTS_PER_WORD);
        again.margins[index] == sample.margins[place][..super::EVENTS_PER_WORD]
            && again.images[index] == images[..of_first]
    });
    if same && again.words[0].energy_gev == sample.words[0].energy_gev {
        return Ok(());
    }
    Err(TableError::Unlike { path: folder.into(), species: sample.species.to_string() })
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
    pads: &[PadKey],
    throw: &Throw,
    repetitions: usize,
) -> Result<Sample, TableError> {
    let lacks = |what: String| TableError::Parts { species: throw.species.to_string(), what };
    let sample = table
        .samples
        .iter()
        .find(|sample| sample.throw == *throw)
        .ok_or_else(|| lacks("there are none".into()))?;
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
        pads: pads.to_vec(),
    })
}
