//! The response tables of a study on disk: where they are, and what they are made from.

use std::path::PathBuf;

use crate::response::store::sha256;
use crate::response::{Sample, Scene, TableError, TableStamp, Throw, reuse};
use crate::study::Study;
use crate::telescope::Threshold;

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
    let stamp = TableStamp {
        study_checksum: study.checksum.clone(),
        upstream_checksum: sha256(upstream(study, scene).as_bytes()),
        seed: study.seed,
    };
    let made_from: Vec<&Throw> = throws.iter().map(|(throw, _)| throw).collect();
    let name = sha256(format!("{} {made_from:?}", stamp.upstream_checksum).as_bytes());
    let folder = tables.folder.join(&name[..16]);
    reuse::samples(&folder, &stamp, scene, throws, tables.rebuild, tick)
}

/// Everything that decides what a cell of the table holds, spelt out; nothing else.
fn upstream(study: &Study, scene: &Scene<'_>) -> String {
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
    format!(
        "{} {place:?} {:?} {:?} {:?} {:?} {kinds:?}",
        study.engine.name(),
        study.air,
        scene.sky_per_ns,
        scene.pointing,
        scene.light_scale,
    )
}
