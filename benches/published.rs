//! The published trigger cases of `tests/cases` at full size: what `tests/validation/published.rs` runs
//! reduced. Prints rates, thresholds and the time each case takes.

use std::path::Path;
use std::time::Instant;

use nightpool::plan::plan;
use nightpool::study::Study;

/// Showers of each background and of gamma rays.
const BACKGROUND_SHOWERS: u64 = 30_000;
const GAMMA_SHOWERS: u64 = 6_000;

fn main() {
    for name in
        ["system_8m2", "single_75m2", "four_110m2_before", "four_110m2_after", "design_110m2"]
    {
        let path = format!("{}/tests/cases/{name}.toml", env!("CARGO_MANIFEST_DIR"));
        let mut study = Study::read(Path::new(&path)).expect("the case is a study");
        (study.budget.gamma_showers, study.budget.background_showers) =
            (GAMMA_SHOWERS, BACKGROUND_SHOWERS);
        let start = Instant::now();
        let result = plan(&study, None, &()).expect("the case can be planned");
        println!("{name}, {:.0} s", start.elapsed().as_secs_f64());
        for row in &result.ranking {
            println!(
                "  {}: {:.1} +- {:.1} Hz, threshold {:.0} +- {:.0} GeV, gamma {:.3} +- {:.3} Hz",
                row.layout,
                row.background_rate_hz,
                row.background_rate_error_hz,
                row.threshold_gev,
                row.threshold_error_gev,
                row.gamma_rate_hz,
                row.gamma_rate_error_hz
            );
        }
    }
}
