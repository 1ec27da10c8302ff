//! The response tables of a study on disk: where they are, and what they are made from.

use std::path::PathBuf;

use crate::response::store::sha256;
use crate::response::{Column, PadKey, Sample, Scene, TableError, TableStamp, Throw, reuse};
use crate::study::Study;
use crate::telescope::Threshold;

use super::setup;

/// Where response tables are kept, and whether to make them again.
///
/// A folder holds any number of tables, each in a folder of its own that is named by what it was
/// made from. Studies that differ in their layouts, thresholds, costs, spectra or ranking only
/// share a table; so do `plan` and `search` where they throw the same events.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Tables {
    /// The folder of tables.
    pub folder: PathBuf,
    /// Simulate again and replace what is there.
    pub rebuild: bool,
}

/// The samples of some throws, each repeated a number of times; from a stored table as far as it
/// goes.
pub(super) fn samples(
    study: &Study,
    scene: &Scene<'_>,
    throws: &[(Throw, usize)],
    tables: Option<&Tables>,
    tick: &(dyn Fn() + Sync),
) -> Result<Vec<Sample>, TableError> {
    let Some(tables) = tables else {
        let fresh = throws.iter().map(|(throw, repetitions)| {
            let words = 0..throw.word_count() * repetitions;
            let mut sample = Sample::simulate_words(scene, throw, words, tick);
            for word in &mut sample.words {
                word.exposure /= *repetitions as f64;
            }
            sample
        });
        return Ok(fresh.collect());
    };
    let (folder, stamp) = tables.place(study, &scene.sky_per_ns, throws);
    reuse::samples(&folder, &stamp, scene, throws, tables.rebuild, tick)
}

/// The same from a stored table alone, without light tables and so without a look at its first
/// words; nothing if it lacks something or is to be rebuilt.
pub(super) fn stored(
    study: &Study,
    (columns, sky_per_ns): (&[Column], &[f64]),
    throws: &[(Throw, usize)],
    tables: Option<&Tables>,
) -> Result<Option<Vec<Sample>>, TableError> {
    let Some(tables) = tables.filter(|tables| !tables.rebuild) else { return Ok(None) };
    let (folder, stamp) = tables.place(study, sky_per_ns, throws);
    let pads: Vec<PadKey> = columns.iter().map(|column| PadKey::of(column, &study.kinds)).collect();
    reuse::stored(&folder, &stamp, &pads, throws)
}

impl Tables {
    /// The folder of the table of some throws under some sky, and what it is made from.
    fn place(
        &self,
        study: &Study,
        sky_per_ns: &[f64],
        throws: &[(Throw, usize)],
    ) -> (PathBuf, TableStamp) {
        let stamp = TableStamp {
            study_checksum: study.checksum.clone(),
            upstream_checksum: sha256(upstream(study, sky_per_ns).as_bytes()),
            seed: study.seed,
        };
        let made_from: Vec<&Throw> = throws.iter().map(|(throw, _)| throw).collect();
        let name = sha256(format!("{} {made_from:?}", stamp.upstream_checksum).as_bytes());
        (self.folder.join(&name[..16]), stamp)
    }
}

/// Everything that decides what a cell of the table holds, spelt out; nothing else.
fn upstream(study: &Study, sky_per_ns: &[f64]) -> String {
    let kinds: Vec<_> = study
        .kinds
        .iter()
        .map(|kind| {
            let mut kind = kind.clone();
            (kind.cost, kind.threshold) = (0.0, Threshold::FixedPe(0.0));
            kind
        })
        .collect();
    let place = (study.site.altitude_m, study.site.field_ut);
    let (engine, air, pointing) = (study.engine.name(), &study.air, setup::pointing(study));
    format!("{engine} {place:?} {air:?} {sky_per_ns:?} {pointing:?} {kinds:?}")
}
