//! The tables that ship with the program, made by the reference cascade.

use std::io::Cursor;

use polars::prelude::{DataFrame, ParquetReader, SerReader};

use super::emitters::{Emitter, EmitterNode, EmitterTable};
use super::longitudinal::GaisserHillas;
use crate::numerics::Stream;
use crate::shower::cascade::CascadeSpecies;

const EMITTERS: &[u8] = include_bytes!("data/emitters.parquet");
const AGES: &str = include_str!("data/emitter_ages.csv");
const DEVELOPMENT: &str = include_str!("data/development.csv");

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
        let mut nodes = Vec::new();
        for (index, (age, numbers)) in ages.iter().enumerate() {
            let bad = || TableError::Line {
                file: "emitter_ages.csv",
                line: index + 1,
                text: age.clone(),
            };
            let (&[fraction, count], Ok(age)) = (&numbers[..], age.parse()) else {
                return Err(bad());
            };
            let last = first + count as usize;
            if last > columns[0].len() {
                return Err(bad());
            }
            let emitters = (first..last).map(emitter).collect();
            nodes.push(EmitterNode { age, fraction, emitters });
            first = last;
        }
        let source = "reference cascade of this program".into();
        Ok(Self { floor_gev: 0.020, source, nodes })
    }
}

/// How showers of the reference cascade develop and fluctuate, by primary and energy.
///
/// ln(depth of maximum after the start), ln(scale length) and ln(track length per energy) are
/// drawn from a normal law with the tabulated means and covariances, interpolated in ln E. Beyond
/// the ends of the table (5 GeV, 100 TeV) the outermost rows are continued linearly.
///
/// The track length is that of particles above 20 MeV: [`EmitterNode::fraction`] of these tables is
/// close to 1 and corrects the shape of the profile.
#[derive(Clone, Debug)]
pub struct DevelopmentTable {
    gamma: Vec<Row>,
    electron: Vec<Row>,
}

#[derive(Clone, Debug)]
struct Row {
    log_energy: f64,
    start_g_cm2: f64,
    mean: [f64; 3],
    covariance: [f64; 6],
}

impl DevelopmentTable {
    /// The table that ships.
    ///
    /// # Errors
    /// A damaged table; not for the file that ships.
    pub fn shipped() -> Result<Self, TableError> {
        let (mut gamma, mut electron) = (Vec::new(), Vec::new());
        for (index, (name, n)) in rows("development.csv", DEVELOPMENT)?.iter().enumerate() {
            if n.len() != 12 {
                return Err(TableError::Line {
                    file: "development.csv",
                    line: index + 1,
                    text: name.clone(),
                });
            }
            let row = Row {
                log_energy: n[0].ln(),
                start_g_cm2: n[2],
                mean: [n[3], n[4], n[5]],
                covariance: [n[6], n[7], n[8], n[9], n[10], n[11]],
            };
            if name == "gamma" { gamma.push(row) } else { electron.push(row) }
        }
        Ok(Self { gamma, electron })
    }

    fn row(&self, species: CascadeSpecies, energy_gev: f64) -> Row {
        let rows = if species == CascadeSpecies::Gamma { &self.gamma } else { &self.electron };
        let log_energy = energy_gev.ln();
        let upper = rows.partition_point(|row| row.log_energy < log_energy);
        let upper = upper.clamp(1, rows.len() - 1);
        let (a, b) = (&rows[upper - 1], &rows[upper]);
        let share = (log_energy - a.log_energy) / (b.log_energy - a.log_energy);
        let mix = |a: f64, b: f64| a + share * (b - a);
        // Covariances are not continued beyond the ends: they must stay positive.
        let inside = share.clamp(0.0, 1.0);
        let within = |a: f64, b: f64| a + inside * (b - a);
        Row {
            log_energy,
            start_g_cm2: within(a.start_g_cm2, b.start_g_cm2),
            mean: [0, 1, 2].map(|i| mix(a.mean[i], b.mean[i])),
            covariance: [0, 1, 2, 3, 4, 5].map(|i| within(a.covariance[i], b.covariance[i])),
        }
    }

    /// Draws the depth of a photon's first interaction, g/cm2 along the axis.
    pub fn photon_start_g_cm2(&self, energy_gev: f64, stream: &mut Stream) -> f64 {
        self.row(CascadeSpecies::Gamma, energy_gev).start_g_cm2 * stream.exponential()
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
        let row = self.row(species, energy_gev);
        let [uu, uv, uw, vv, vw, ww] = row.covariance;
        // Cholesky factor of the covariance.
        let a = uu.sqrt();
        let (b, d) = (uv / a, uw / a);
        let c = (vv - b * b).max(0.0).sqrt();
        let e = if c > 0.0 { (vw - b * d) / c } else { 0.0 };
        let f = (ww - d * d - e * e).max(0.0).sqrt();
        let (x, y, z) = (stream.normal(), stream.normal(), stream.normal());
        let u = row.mean[0] + a * x;
        let v = row.mean[1] + b * x + c * y;
        let w = row.mean[2] + d * x + e * y + f * z;
        GaisserHillas::new(start_g_cm2, start_g_cm2 + u.exp(), v.exp(), w.exp() * energy_gev)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn shipped_tables_are_whole() {
        let table = EmitterTable::shipped().expect("the table that ships is readable");
        assert!(table.nodes.len() >= 12);
        for node in &table.nodes {
            assert!(node.emitters.len() >= 1000, "age {}", node.age);
            // The fit is by moments: where most of the light comes from it follows the tracks to
            // a tenth; at early ages it falls short of the two particles of the first pair.
            let within = (node.fraction - 1.0).abs() < 0.1 || node.age < 0.5;
            assert!(within, "age {}: {}", node.age, node.fraction);
            let above = node.emitters.iter().all(|e| f64::from(e.energy_gev) > 0.999 * 0.020);
            assert!(above, "age {}", node.age);
        }
        DevelopmentTable::shipped().expect("the table that ships is readable");
    }
}
