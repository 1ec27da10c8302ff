//! The table on disk: a folder of Parquet files and a list of them.
//!
//! A *block* is some words of one primary on some pads, in four files: words, pads, margins (only
//! those above the floor of the code) and images. Each file carries, as key-value metadata, what it
//! belongs to and how to read it. Events are numbered 64 x word + place. Extending a table adds
//! blocks and replaces the list; no byte of an older file changes. [`write()`] puts everything in one
//! block a primary, so that tables of equal content are equal byte by byte.

mod frames;
mod manifest;

use std::io::Cursor;
use std::path::Path;

use polars::io::parquet::write::KeyValueMetadata;
use polars::prelude::{DataFrame, ParquetCompression, ParquetReader, ParquetWriter, SerReader};

use super::error::TableError;
use super::sample::Sample;
use super::table::{ResponseTable, TableBuilder, TableStamp};

pub use manifest::{
    Block, FORMAT, FORMAT_VERSION, FileRecord, MANIFEST, Manifest, PROGRAM_VERSION, ThrowRecord,
    sha256,
};

/// Rows of a Parquet row group.
const ROWS_PER_GROUP: usize = 1 << 18;

/// Writes a table into a folder, replacing the list of what was there.
///
/// Files are named by their content, written beside their place and renamed, the list last: an
/// interrupted run leaves the older table whole.
///
/// # Errors
/// [`TableError`] if a file cannot be written.
pub fn write(folder: &Path, table: &ResponseTable) -> Result<(), TableError> {
    let mut list = Manifest::new(&table.stamp);
    for sample in &table.samples {
        list.blocks.push(write_block(folder, &table.stamp, sample)?);
    }
    place(&folder.join(MANIFEST), &list.sealed())?;
    let kept: Vec<&str> = names(&list.blocks).collect();
    for entry in std::fs::read_dir(folder).into_iter().flatten().flatten() {
        let name = entry.file_name().to_string_lossy().into_owned();
        if is_ours(&name) && !kept.contains(&name.as_str()) {
            // A file that is no longer listed is harmless; failing to remove it is too.
            let _ = std::fs::remove_file(entry.path());
        }
    }
    Ok(())
}

/// Adds parts, words or pads, to the table in a folder, or begins one. The parts that are there
/// keep their files unchanged.
///
/// # Errors
/// [`TableError`] if the table there is not of this stamp, or a file cannot be written.
pub fn extend(folder: &Path, stamp: &TableStamp, parts: &[Sample]) -> Result<(), TableError> {
    let mut list = match Manifest::read(folder) {
        Ok(list) => list,
        Err(TableError::Missing { .. }) => Manifest::new(stamp),
        Err(error) => return Err(error),
    };
    list.belongs_to(folder, stamp)?;
    for part in parts {
        let block = write_block(folder, stamp, part)?;
        if !list.blocks.contains(&block) {
            list.blocks.push(block);
        }
    }
    place(&folder.join(MANIFEST), &list.sealed())
}

/// Reads the table of a folder; with `expected`, only if it belongs to that study.
///
/// # Errors
/// [`TableError`] that says why the table is refused: missing, truncated, corrupted, foreign,
/// outdated, or parts that make no whole.
pub fn read(folder: &Path, expected: Option<&TableStamp>) -> Result<ResponseTable, TableError> {
    let list = Manifest::read(folder)?;
    if let Some(expected) = expected {
        list.belongs_to(folder, expected)?;
    }
    let mut builder = TableBuilder::new();
    for block in &list.blocks {
        builder.insert(read_block(folder, block)?);
    }
    builder.finish(list.stamp())
}

/// Whether a file is named as [`write_block`] names them.
fn is_ours(name: &str) -> bool {
    let Some(stem) = name.strip_suffix(".parquet") else { return false };
    let mut pieces = stem.rsplit('-');
    let hash = pieces.next().unwrap_or_default();
    let what = pieces.next().unwrap_or_default();
    hash.len() == 12 && ["words", "pads", "margins", "images"].contains(&what)
}

fn names(blocks: &[Block]) -> impl Iterator<Item = &str> {
    blocks.iter().flat_map(|block| block.files.iter().map(|file| file.name.as_str()))
}

/// Writes one block.
fn write_block(folder: &Path, stamp: &TableStamp, sample: &Sample) -> Result<Block, TableError> {
    let throw = ThrowRecord::of(&sample.throw);
    let (first_word, end_word) = (sample.first_word, sample.first_word + sample.words.len());
    let species = sample.species.to_string().replace(' ', "-");
    let file = |what: &str, frame: polars::prelude::PolarsResult<DataFrame>| {
        let start = folder.join(format!("{species}-{what}"));
        let refused = |source| TableError::Parquet { path: start, source };
        let metadata = metadata(stamp, &species, &throw);
        let bytes = frame.and_then(|frame| parquet(frame, metadata)).map_err(refused)?;
        let sha256 = sha256(&bytes);
        // Named by content, so that no older table's file is ever replaced by another.
        let range = format!("{first_word:07}-{end_word:07}");
        let name = format!("{species}-{range}-{what}-{}.parquet", &sha256[..12]);
        place(&folder.join(&name), &bytes)?;
        Ok::<_, TableError>(FileRecord { name, bytes: bytes.len() as u64, sha256 })
    };
    let files = [
        file("words", frames::words(sample))?,
        file("pads", frames::pads(sample))?,
        file("margins", frames::margins(sample))?,
        file("images", frames::images(sample))?,
    ];
    Ok(Block { throw, first_word, end_word, files })
}

/// What each file says about itself.
fn metadata(stamp: &TableStamp, species: &str, throw: &ThrowRecord) -> Vec<(String, String)> {
    let pairs = [
        ("format", FORMAT.to_owned()),
        ("format_version", FORMAT_VERSION.to_string()),
        ("program_version", PROGRAM_VERSION.to_owned()),
        ("study_checksum", stamp.study_checksum.clone()),
        ("upstream_checksum", stamp.upstream_checksum.clone()),
        ("seed", stamp.seed.to_string()),
        ("primary", species.to_owned()),
        ("throw", serde_json::to_string(throw).unwrap_or_default()),
        ("events", "event = 64 * word + place in the word".to_owned()),
        ("margin", "least margin of a code, pe = 0.5 * exp((margin_code - 1) / 500)".to_owned()),
    ];
    pairs.map(|(key, value)| (key.to_owned(), value)).into()
}

fn parquet(
    mut frame: DataFrame,
    metadata: Vec<(String, String)>,
) -> polars::prelude::PolarsResult<Vec<u8>> {
    let mut bytes = Vec::new();
    ParquetWriter::new(&mut bytes)
        .with_compression(ParquetCompression::Zstd(None))
        .with_row_group_size(Some(ROWS_PER_GROUP))
        .with_key_value_metadata(Some(KeyValueMetadata::from_static(metadata)))
        .finish(&mut frame)?;
    Ok(bytes)
}

/// Writes one file beside its place and renames it; leaves a file of the same bytes alone.
fn place(path: &Path, bytes: &[u8]) -> Result<(), TableError> {
    let failed = |source| TableError::Io { path: path.into(), source };
    let same_length = std::fs::metadata(path).is_ok_and(|found| found.len() == bytes.len() as u64);
    if same_length && std::fs::read(path).map_err(failed)? == bytes {
        return Ok(());
    }
    let (Some(folder), Some(name)) = (path.parent(), path.file_name()) else {
        return Err(failed(std::io::Error::from(std::io::ErrorKind::InvalidFilename)));
    };
    let name = name.to_string_lossy().into_owned();
    crate::staging::write_files(folder, &[(name, bytes)])
        .map_err(|(path, source)| TableError::Io { path, source })
}

/// Reads one block, every byte checked.
fn read_block(folder: &Path, block: &Block) -> Result<Sample, TableError> {
    let [words, pads, margins, images] = &block.files;
    let in_file = |file: &FileRecord| {
        let path = folder.join(&file.name);
        move |source| TableError::Parquet { path: path.clone(), source }
    };
    let outside = |file: &FileRecord| TableError::Corrupted {
        path: folder.join(&file.name),
        what: "rows lie outside the block".into(),
    };
    let throw = block.throw.throw().ok_or_else(|| TableError::Corrupted {
        path: folder.join(MANIFEST),
        what: "the throw cannot be read".into(),
    })?;
    let first = block.first_word;
    let count = block.end_word.saturating_sub(first);
    let (word_list, pad_list) = (
        frames::words_of(&checked(folder, words)?).map_err(in_file(words))?,
        frames::pads_of(&checked(folder, pads)?).map_err(in_file(pads))?,
    );
    if word_list.len() != count {
        return Err(outside(words));
    }
    let codes = frames::margins_of(&checked(folder, margins)?, first, count, pad_list.len());
    let codes = codes.map_err(in_file(margins))?.ok_or_else(|| outside(margins))?;
    let cells = frames::images_of(&checked(folder, images)?, first, count, pad_list.len());
    let cells = cells.map_err(in_file(images))?.ok_or_else(|| outside(images))?;
    Ok(Sample {
        species: throw.species,
        throw,
        first_word: first,
        words: word_list,
        pads: pad_list,
        margins: codes,
        images: cells,
    })
}

/// The frame of a file whose length and checksum are those that were listed.
fn checked(folder: &Path, file: &FileRecord) -> Result<DataFrame, TableError> {
    let path = folder.join(&file.name);
    let bytes =
        std::fs::read(&path).map_err(|source| TableError::Io { path: path.clone(), source })?;
    let found = bytes.len() as u64;
    if found != file.bytes {
        return Err(TableError::Truncated { path, found, expected: file.bytes });
    }
    if sha256(&bytes) != file.sha256 {
        let what = "its bytes are not those that were written".into();
        return Err(TableError::Corrupted { path, what });
    }
    ParquetReader::new(Cursor::new(bytes))
        .finish()
        .map_err(|source| TableError::Parquet { path, source })
}
