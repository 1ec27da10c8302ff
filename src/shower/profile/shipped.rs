//! The tables that ship with the program, made by the reference cascade.

use std::io::Cursor;
use std::sync::OnceLock;

use polars::prelude::{DataFrame, ParquetReader, SerReader};

use super::emitters::{Emitter, EmitterNode, EmitterTable};
use super::library::Shape;
use super::longitudinal::GaisserHillas;
use crate::numerics::Stream;
use crate::shower::cascade::CascadeSpecies;

const EMITTERS: &[u8] = include_bytes!("data/emitters.parquet");
const AGES: &str = include_str!("data/emitter_ages.csv");
const DEVELOPMENT: &str = include_str!("data/development.csv");
const SHOWERS: &[u8] = include_bytes!("data/showers.parquet");
const PROFILES: &[u8] = include_bytes!("data/profiles.parquet");

/// What can be wrong with a table.
#[derive(Debug, thiserror::Error)]
pub enum TableError {
    /// The Parquet file cannot be read.
    #[error("emitter table: {0}")]
    Parquet(#[from] polars::error::PolarsError),
    /// A line of a CSV file cannot be read.
    #[error("{file}, line {line}: cannot read `{text}`")]
    Line {
        /// The file.
        file: &'static str,
        /// Its line, from 1.
        line: usize,
        /// What stands there.
        text: String,
    },
}

/// The numbers of each line of a CSV file, header and comments left out; the first word of a line
/// may be a name.
fn rows(file: &'static str, text: &str) -> Result<Vec<(String, Vec<f64>)>, TableError> {
    let mut found = Vec::new();
    let lines = text.lines().enumerate().filter(|(_, line)| !line.starts_with('#'));
    for (index, line) in lines.skip(1) {
        let words: Vec<&str> = line.split(',').collect();
        let numbers = words.iter().skip(1).map(|word| word.parse::<f64>());
        let numbers = numbers.collect::<Result<Vec<_>, _>>().map_err(|_| TableError::Line {
            file,
            line: index + 1,
            text: line.into(),
        })?;
        found.push((words[0].to_owned(), numbers));
    }
    Ok(found)
}

impl EmitterTable {
    /// The emitters of the reference cascade.
    ///
    /// # Errors
    /// A damaged table; not for the files that ship (test `shipped_tables_are_whole`).
    pub fn shipped() -> Result<Self, TableError> {
        let frame = ParquetReader::new(Cursor::new(EMITTERS)).finish()?;
        Self::from_frame(&frame, &rows("emitter_ages.csv", AGES)?)
    }

    fn from_frame(frame: &DataFrame, ages: &[(String, Vec<f64>)]) -> Result<Self, TableError> {
        let column = |name: &str| -> Result<Vec<f32>, polars::error::PolarsError> {
            Ok(frame.column(name)?.f32()?.into_no_null_iter().collect())
        };
        let names = [
            "energy_gev",
            "angle_x_rad",
            "angle_y_rad",
            "offset_x_g_cm2",
            "offset_y_g_cm2",
            "lag_g_cm2",
            "angle_lever",
            "offset_lever",
        ];
        let columns = names.into_iter().map(column).collect::<Result<Vec<_>, _>>()?;
        let emitter = |row: usize| Emitter {
            energy_gev: columns[0][row],
            angle_rad: [columns[1][row], columns[2][row]],
            offset_g_cm2: [columns[3][row], columns[4][row]],
            lag_g_cm2: columns[5][row],
            angle_lever: columns[6][row],
            offset_lever: columns[7][row],
        };
        let mut first = 0;
        let (mut nodes, mut energies_gev) = (Vec::new(), Vec::new());
        for (index, (energy, numbers)) in ages.iter().enumerate() {
            let bad = || TableError::Line {
                file: "emitter_ages.csv",
                line: index + 1,
                text: energy.clone(),
            };
            let (&[age, fraction, count], Ok(energy)) = (&numbers[..], energy.parse::<f64>())
            else {
                return Err(bad());
            };
            if energies_gev.last() != Some(&energy) {
                energies_gev.push(energy);
            }
            let last = first + count as usize;
            if last > columns[0].len() {
                return Err(bad());
            }
            let emitters = (first..last).map(emitter).collect();
            nodes.push(EmitterNode { age, fraction, emitters });
            first = last;
        }
        let source = "reference cascade of this program".into();
        Ok(Self { floor_gev: 0.020, source, energies_gev, nodes })
    }
}

/// How showers of the reference cascade develop and fluctuate, by primary and energy.
///
/// A shower is drawn from a library of recorded ones at the two energies around its own, carried
/// to its energy by [`Shape`]: mean profile, fluctuations and their correlations are those of the
/// cascade. Beyond the ends of the library (0.3 GeV, 8 TeV) the outermost showers are carried
/// further. The numbers are of particles above 20 MeV.
#[derive(Clone, Debug)]
pub struct DevelopmentTable {
    starts: Vec<(f64, f64)>,
    library: &'static Library,
}

#[derive(Debug)]
struct Library {
    gamma: Vec<LibraryNode>,
    electron: Vec<LibraryNode>,
}

#[derive(Debug)]
struct LibraryNode {
    energy_gev: f64,
    showers: Vec<LibraryShower>,
}

#[derive(Debug)]
struct LibraryShower {
    max_g_cm2: f64,
    length_g_cm2: f64,
    sizes: Vec<f32>,
}

static LIBRARY: OnceLock<Library> = OnceLock::new();

impl Library {
    fn shipped() -> Result<&'static Self, TableError> {
        if let Some(library) = LIBRARY.get() {
            return Ok(library);
        }
        let showers = ParquetReader::new(Cursor::new(SHOWERS)).finish()?;
        let profiles = ParquetReader::new(Cursor::new(PROFILES)).finish()?;
        let read = Self::from_frames(&showers, &profiles)?;
        Ok(LIBRARY.get_or_init(|| read))
    }

    fn from_frames(
        showers: &DataFrame,
        profiles: &DataFrame,
    ) -> Result<Self, polars::error::PolarsError> {
        let column = |frame: &DataFrame, name: &str| {
            let values: Vec<f32> = frame.column(name)?.f32()?.into_no_null_iter().collect();
            Ok::<_, polars::error::PolarsError>(values)
        };
        let electron = column(showers, "electron")?;
        let energy = column(showers, "energy_gev")?;
        let max = column(showers, "max_g_cm2")?;
        let length = column(showers, "length_g_cm2")?;
        let bins = column(showers, "bins")?;
        let sizes = column(profiles, "particles")?;
        let mut library = Self { gamma: Vec::new(), electron: Vec::new() };
        let mut first = 0;
        for row in 0..energy.len() {
            let nodes =
                if electron[row] > 0.5 { &mut library.electron } else { &mut library.gamma };
            let energy_gev = f64::from(energy[row]);
            if nodes.last().is_none_or(|node| node.energy_gev != energy_gev) {
                nodes.push(LibraryNode { energy_gev, showers: Vec::new() });
            }
            let last = (first + bins[row] as usize).min(sizes.len());
            let place = nodes.len() - 1;
            nodes[place].showers.push(LibraryShower {
                max_g_cm2: f64::from(max[row]),
                length_g_cm2: f64::from(length[row]),
                sizes: sizes[first..last].to_vec(),
            });
            first = last;
        }
        Ok(library)
    }
}

impl DevelopmentTable {
    /// The table that ships.
    ///
    /// # Errors
    /// A damaged table; not for the file that ships.
    pub fn shipped() -> Result<Self, TableError> {
        let mut starts = Vec::new();
        for (index, (name, n)) in rows("development.csv", DEVELOPMENT)?.iter().enumerate() {
            if n.len() < 3 {
                return Err(TableError::Line {
                    file: "development.csv",
                    line: index + 1,
                    text: name.clone(),
                });
            }
            if name == "gamma" {
                starts.push((n[0].ln(), n[2]));
            }
        }
        Ok(Self { starts, library: Library::shipped()? })
    }

    /// Draws the depth of a photon's first interaction, g/cm2 along the axis; the mean is held
    /// beyond 5 GeV and 100 TeV.
    pub fn photon_start_g_cm2(&self, energy_gev: f64, stream: &mut Stream) -> f64 {
        let log_energy = energy_gev.ln();
        let upper = self.starts.partition_point(|row| row.0 < log_energy);
        let upper = upper.clamp(1, self.starts.len() - 1);
        let (a, b) = (self.starts[upper - 1], self.starts[upper]);
        let share = ((log_energy - a.0) / (b.0 - a.0)).clamp(0.0, 1.0);
        (a.1 + share * (b.1 - a.1)) * stream.exponential()
    }

    /// Draws the development of a cascade that begins at `start_g_cm2`: the first interaction of a
    /// photon, or where an electron or positron sets out.
    pub fn draw(
        &self,
        species: CascadeSpecies,
        energy_gev: f64,
        start_g_cm2: f64,
        stream: &mut Stream,
    ) -> GaisserHillas {
        let library = self.library;
        let nodes =
            if species == CascadeSpecies::Gamma { &library.gamma } else { &library.electron };
        let upper = nodes.partition_point(|node| node.energy_gev < energy_gev);
        let upper = upper.clamp(1, nodes.len() - 1);
        let (low, high) = (&nodes[upper - 1], &nodes[upper]);
        let share = (energy_gev / low.energy_gev).ln() / (high.energy_gev / low.energy_gev).ln();
        let node = if stream.uniform() < share { high } else { low };
        let place = (stream.uniform() * node.showers.len() as f64) as usize;
        let shower = &node.showers[place];
        let shape = Shape::new(&shower.sizes, shower.max_g_cm2, energy_gev / node.energy_gev);
        GaisserHillas::of_shape(
            start_g_cm2,
            shower.length_g_cm2,
            shape,
            energy_gev,
            stream.uniform(),
        )
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn shipped_tables_are_whole() {
        let table = EmitterTable::shipped().expect("the table that ships is readable");
        assert_eq!(table.nodes.len(), table.energies_gev.len() * table.ages().len());
        for node in &table.nodes {
            assert!(node.emitters.len() >= 100, "age {}", node.age);
            let above = node.emitters.iter().all(|e| f64::from(e.energy_gev) > 0.999 * 0.020);
            assert!(above, "age {}", node.age);
        }
        DevelopmentTable::shipped().expect("the table that ships is readable");
    }
}
