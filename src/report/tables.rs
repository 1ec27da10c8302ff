//! Tables as CSV and Parquet.

use polars::io::parquet::write::KeyValueMetadata;
use polars::prelude::{Column, CsvWriter, DataFrame, ParquetWriter, PolarsResult, SerWriter};

use super::result::{PlanResult, Provenance};

/// A table: named columns and their units.
#[derive(Clone, Debug)]
pub struct Table {
    /// Name of the file, without its ending.
    pub name: &'static str,
    columns: Vec<Column>,
    units: Vec<(&'static str, &'static str)>,
}

impl Table {
    pub(super) fn new(name: &'static str) -> Self {
        Self { name, columns: Vec::new(), units: Vec::new() }
    }

    pub(super) fn text(mut self, name: &'static str, values: Vec<String>) -> Self {
        self.columns.push(Column::new(name.into(), values));
        self
    }

    pub(super) fn whole(mut self, name: &'static str, values: impl Iterator<Item = usize>) -> Self {
        let values: Vec<u32> = values
            .map(|value| u32::try_from(value).expect("a table has under 2^32 rows"))
            .collect();
        self.columns.push(Column::new(name.into(), values));
        self
    }

    pub(super) fn number(
        mut self,
        name: &'static str,
        unit: &'static str,
        values: impl Iterator<Item = f64>,
    ) -> Self {
        self.columns.push(Column::new(name.into(), values.collect::<Vec<f64>>()));
        self.units.push((name, unit));
        self
    }

    fn frame(&self) -> PolarsResult<DataFrame> {
        DataFrame::new_infer_height(self.columns.clone())
    }

    /// The table as CSV with a header row.
    ///
    /// # Errors
    /// Those of polars' writer.
    pub fn csv(&self) -> PolarsResult<Vec<u8>> {
        let mut bytes = Vec::new();
        CsvWriter::new(&mut bytes).include_header(true).n_threads(1).finish(&mut self.frame()?)?;
        Ok(bytes)
    }

    /// The table as Parquet; the provenance and the units of columns stand in the file's metadata.
    ///
    /// # Errors
    /// Those of polars' writer.
    pub fn parquet(&self, provenance: &Provenance) -> PolarsResult<Vec<u8>> {
        let mut pairs = vec![
            ("nightpool_version".to_owned(), provenance.version.clone()),
            ("study".to_owned(), provenance.study.clone()),
            ("study_checksum".to_owned(), provenance.study_checksum.clone()),
            ("seed".to_owned(), provenance.seed.to_string()),
            ("engine".to_owned(), provenance.engine.clone()),
        ];
        pairs
            .extend(self.units.iter().map(|(name, unit)| (format!("unit:{name}"), (*unit).into())));
        let mut bytes = Vec::new();
        ParquetWriter::new(&mut bytes)
            .set_parallel(false)
            .with_key_value_metadata(Some(KeyValueMetadata::from_static(pairs)))
            .finish(&mut self.frame()?)?;
        Ok(bytes)
    }
}

/// The ranking, best layout first.
pub fn ranking_table(result: &PlanResult) -> Table {
    let rows = &result.ranking;
    let number = |pick: fn(&super::LayoutRow) -> f64| rows.iter().map(pick);
    Table::new("ranking")
        .whole("rank", rows.iter().map(|row| row.rank))
        .whole("tier", rows.iter().map(|row| row.tier))
        .text("layout", rows.iter().map(|row| row.layout.clone()).collect())
        .whole("telescopes", rows.iter().map(|row| row.telescopes))
        .text("kinds", rows.iter().map(|row| row.kinds.clone()).collect())
        .whole("telescopes_required", rows.iter().map(|row| row.condition))
        .number("mirror_area_m2", "m2", number(|row| row.mirror_area_m2))
        .number("gamma_rate_hz", "Hz", number(|row| row.gamma_rate_hz))
        .number("gamma_rate_error_hz", "Hz", number(|row| row.gamma_rate_error_hz))
        .number("background_rate_hz", "Hz", number(|row| row.background_rate_hz))
        .number("background_rate_error_hz", "Hz", number(|row| row.background_rate_error_hz))
        .number("threshold_gev", "GeV", number(|row| row.threshold_gev))
        .number("threshold_error_gev", "GeV", number(|row| row.threshold_error_gev))
        .number("accidental_rate_hz", "Hz", number(|row| row.accidental_rate_hz))
        .number("gamma_rate_per_hour", "1/h", number(|row| row.gamma_rate_per_hour))
        .number("dead_fraction", "1", number(|row| row.dead_fraction))
        .number("cost", "study's unit", number(|row| row.cost))
        .number("rate_per_cost_hz", "Hz per study's unit", number(|row| row.rate_per_cost_hz))
        .number("rate_per_root_background", "Hz^(1/2)", number(|row| row.rate_per_root_background))
        .number("data_gb_per_night", "1e9 bytes", number(|row| row.data_gb_per_night))
        .number("order_probability", "1", number(|row| row.order_probability))
        .number("score", "study's choice", number(|row| row.score))
        .number("score_error", "study's choice", number(|row| row.score_error))
}

/// Rate and peak energy of each primary in each layout.
pub fn primary_table(result: &PlanResult) -> Table {
    let rows = &result.primaries;
    Table::new("primaries")
        .text("layout", rows.iter().map(|row| row.layout.clone()).collect())
        .text("primary", rows.iter().map(|row| row.primary.clone()).collect())
        .number("rate_hz", "Hz", rows.iter().map(|row| row.rate_hz))
        .number("rate_error_hz", "Hz", rows.iter().map(|row| row.rate_error_hz))
        .number("peak_energy_gev", "GeV", rows.iter().map(|row| row.peak_energy_gev))
        .number("peak_energy_error_gev", "GeV", rows.iter().map(|row| row.peak_energy_error_gev))
}

/// Effective areas by layout, primary and energy bin.
pub fn effective_area_table(result: &PlanResult) -> Table {
    let rows = &result.effective_areas;
    Table::new("effective_area")
        .text("layout", rows.iter().map(|row| row.layout.clone()).collect())
        .text("primary", rows.iter().map(|row| row.primary.clone()).collect())
        .number("energy_low_gev", "GeV", rows.iter().map(|row| row.energy_low_gev))
        .number("energy_high_gev", "GeV", rows.iter().map(|row| row.energy_high_gev))
        .number("effective_area_m2", "m2", rows.iter().map(|row| row.area_m2))
        .number("effective_area_error_m2", "m2", rows.iter().map(|row| row.error_m2))
}

/// Differential trigger rates by layout, source or background, and energy bin.
pub fn rate_table(result: &PlanResult) -> Table {
    let rows = &result.differential_rates;
    Table::new("differential_rate")
        .text("layout", rows.iter().map(|row| row.layout.clone()).collect())
        .text("primary", rows.iter().map(|row| row.primary.clone()).collect())
        .number("energy_low_gev", "GeV", rows.iter().map(|row| row.energy_low_gev))
        .number("energy_high_gev", "GeV", rows.iter().map(|row| row.energy_high_gev))
        .number("rate_hz_gev", "Hz/GeV", rows.iter().map(|row| row.rate_hz_gev))
        .number("rate_error_hz_gev", "Hz/GeV", rows.iter().map(|row| row.error_hz_gev))
}

/// Cherenkov light on the ground.
pub fn light_pool_table(result: &PlanResult) -> Table {
    let rows = &result.light_pool;
    Table::new("light_pool")
        .text("primary", rows.iter().map(|row| row.primary.clone()).collect())
        .number("energy_gev", "GeV", rows.iter().map(|row| row.energy_gev))
        .number("distance_m", "m", rows.iter().map(|row| row.distance_m))
        .number("photons_m2", "1/m2", rows.iter().map(|row| row.photons_m2))
        .number("photons_error_m2", "1/m2", rows.iter().map(|row| row.error_m2))
        .number("photons_spread_m2", "1/m2", rows.iter().map(|row| row.spread_m2))
        .text("telescope", rows.iter().map(|row| row.kind.clone()).collect())
        .number("photoelectrons", "1", rows.iter().map(|row| row.photoelectrons))
}
