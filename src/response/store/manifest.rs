//! The list of a table's files, with checksums; written last, so that a table is whole or absent.

use std::path::Path;

use serde::{Deserialize, Serialize};
use sha2::{Digest, Sha256};

use crate::response::error::TableError;
use crate::response::table::TableStamp;
use crate::response::throw::{Throw, species_key, species_of_key};
use crate::shower::Direction;

/// Name of the list in the table's folder.
pub const MANIFEST: &str = "table.json";
/// What a list of ours says it is.
pub const FORMAT: &str = "nightpool response table";
/// Version of the files' layout.
pub const FORMAT_VERSION: u32 = 2;
/// Version of this program; cells of another version are not used.
pub const PROGRAM_VERSION: &str = env!("CARGO_PKG_VERSION");

/// The list.
#[derive(Clone, Debug, Serialize, Deserialize)]
pub struct Manifest {
    /// [`FORMAT`].
    pub format: String,
    /// [`FORMAT_VERSION`].
    pub format_version: u32,
    /// [`PROGRAM_VERSION`].
    pub program_version: String,
    /// See [`TableStamp`].
    pub study_checksum: String,
    /// See [`TableStamp`].
    pub upstream_checksum: String,
    /// See [`TableStamp`].
    pub seed: u64,
    /// The blocks.
    pub blocks: Vec<Block>,
    /// SHA-256 of all the above.
    pub sha256: String,
}

/// Some words of one primary on some pads.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Block {
    /// How the words were thrown.
    pub throw: ThrowRecord,
    /// First word.
    pub first_word: usize,
    /// One past the last word.
    pub end_word: usize,
    /// The words, pads, margins and images.
    pub files: [FileRecord; 4],
}

/// One file.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct FileRecord {
    /// Its name.
    pub name: String,
    /// Its length, bytes.
    pub bytes: u64,
    /// SHA-256 of its bytes, hexadecimal.
    pub sha256: String,
}

/// A throw with its numbers as text, which is exact where a JSON number need not be.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct ThrowRecord {
    species: String,
    species_key: u64,
    seed: u64,
    energy_gev: [String; 2],
    index: String,
    pointing_zenith_azimuth_rad: [String; 2],
    cone_rad: String,
    centre_m: [String; 2],
    rings_m: Vec<String>,
    words: usize,
}

impl ThrowRecord {
    /// The record of a throw.
    pub fn of(throw: &Throw) -> Self {
        let text = |value: f64| format!("{value:?}");
        Self {
            species: throw.species.to_string(),
            species_key: species_key(throw.species),
            seed: throw.seed,
            energy_gev: [text(throw.energy_gev.0), text(throw.energy_gev.1)],
            index: text(throw.index),
            pointing_zenith_azimuth_rad: [
                text(throw.pointing.zenith_rad),
                text(throw.pointing.azimuth_rad),
            ],
            cone_rad: text(throw.cone_rad),
            centre_m: throw.centre_m.map(text),
            rings_m: throw.rings_m.iter().copied().map(text).collect(),
            words: throw.words,
        }
    }

    /// The throw of a record; nothing if a number or the species cannot be read.
    pub fn throw(&self) -> Option<Throw> {
        let number = |text: &String| text.parse::<f64>().ok();
        let pair = |texts: &[String; 2]| Some((number(&texts[0])?, number(&texts[1])?));
        let (zenith_rad, azimuth_rad) = pair(&self.pointing_zenith_azimuth_rad)?;
        let (x, y) = pair(&self.centre_m)?;
        Some(Throw {
            species: species_of_key(self.species_key)?,
            seed: self.seed,
            energy_gev: pair(&self.energy_gev)?,
            index: number(&self.index)?,
            pointing: Direction { zenith_rad, azimuth_rad },
            cone_rad: number(&self.cone_rad)?,
            centre_m: [x, y],
            rings_m: self.rings_m.iter().map(number).collect::<Option<_>>()?,
            words: self.words,
        })
    }
}

/// SHA-256, hexadecimal.
pub fn sha256(bytes: &[u8]) -> String {
    Sha256::digest(bytes).iter().map(|byte| format!("{byte:02x}")).collect()
}

impl Manifest {
    /// The list of a table without blocks.
    pub fn new(stamp: &TableStamp) -> Self {
        Self {
            format: FORMAT.into(),
            format_version: FORMAT_VERSION,
            program_version: PROGRAM_VERSION.into(),
            study_checksum: stamp.study_checksum.clone(),
            upstream_checksum: stamp.upstream_checksum.clone(),
            seed: stamp.seed,
            blocks: Vec::new(),
            sha256: String::new(),
        }
    }

    /// Where the table comes from.
    pub fn stamp(&self) -> TableStamp {
        TableStamp {
            study_checksum: self.study_checksum.clone(),
            upstream_checksum: self.upstream_checksum.clone(),
            seed: self.seed,
        }
    }

    /// Its bytes, closed with their own checksum.
    pub fn sealed(&self) -> Vec<u8> {
        let open = Self { sha256: String::new(), ..self.clone() };
        let sealed = Self { sha256: sha256(&json(&open)), ..open };
        json(&sealed)
    }

    /// Reads and checks a list.
    ///
    /// # Errors
    /// [`TableError`] if it is missing, damaged, no list of ours, or of another version.
    pub fn read(folder: &Path) -> Result<Self, TableError> {
        let path = folder.join(MANIFEST);
        let bytes = match std::fs::read(&path) {
            Ok(bytes) => bytes,
            Err(error) if error.kind() == std::io::ErrorKind::NotFound => {
                return Err(TableError::Missing { path: folder.into() });
            }
            Err(source) => return Err(TableError::Io { path, source }),
        };
        let corrupted = |what: String| TableError::Corrupted { path: path.clone(), what };
        let value: serde_json::Value =
            serde_json::from_slice(&bytes).map_err(|error| corrupted(error.to_string()))?;
        let format = value.get("format").and_then(|format| format.as_str()).unwrap_or("unknown");
        if format != FORMAT {
            let (found, expected) = (format.to_owned(), FORMAT.to_owned());
            return Err(TableError::Foreign { path, what: "the format", found, expected });
        }
        let version = value.get("format_version").and_then(serde_json::Value::as_u64);
        if version != Some(u64::from(FORMAT_VERSION)) {
            return Err(TableError::Outdated {
                path,
                what: "format version",
                found: version.map_or("none".into(), |version| version.to_string()),
                expected: FORMAT_VERSION.to_string(),
            });
        }
        let list: Self =
            serde_json::from_value(value).map_err(|error| corrupted(error.to_string()))?;
        if list.sealed() != bytes {
            return Err(corrupted("its checksum does not fit".into()));
        }
        if list.program_version != PROGRAM_VERSION {
            return Err(TableError::Outdated {
                path,
                what: "program version",
                found: list.program_version,
                expected: PROGRAM_VERSION.into(),
            });
        }
        Ok(list)
    }

    /// Whether this is a table of the study that `expected` names.
    ///
    /// # Errors
    /// [`TableError::Foreign`] if it is not.
    pub fn belongs_to(&self, folder: &Path, expected: &TableStamp) -> Result<(), TableError> {
        let path = folder.join(MANIFEST);
        if self.upstream_checksum != expected.upstream_checksum {
            return Err(TableError::Foreign {
                path,
                what: "the checksum of what the table was made from",
                found: self.upstream_checksum.clone(),
                expected: expected.upstream_checksum.clone(),
            });
        }
        if self.seed != expected.seed {
            let (found, expected) = (self.seed.to_string(), expected.seed.to_string());
            return Err(TableError::Foreign { path, what: "the seed", found, expected });
        }
        Ok(())
    }
}

fn json(manifest: &Manifest) -> Vec<u8> {
    // Strings and integers only: this cannot fail.
    let mut bytes = serde_json::to_vec_pretty(manifest).unwrap_or_default();
    bytes.push(b'\n');
    bytes
}
