//! Threshold scans and quiet thresholds against their definitions.

use std::path::Path;

use nightpool::plan::{ScanRequest, plan, scan};
use nightpool::report::ThresholdScan;
use nightpool::study::Study;
use nightpool::telescope::Accidental;
use nightpool::telescope::accidental::array_rate_hz;

use crate::command::{TINY, folder, nightpool};

/// Two telescopes on the line of sight's azimuth, 110 m apart: 125 ns of differential delay.
fn pair(threshold: &str, trigger: &str, window_ns: f64, showers: usize) -> Study {
    let start = TINY.find("[[layout]]").unwrap();
    let end = TINY.find("[pointing]").unwrap();
    let layout = format!(
        "[[layout]]\nname = \"pair\"\nwindow_ns = {window_ns}\n[[layout.stand]]\n\
         telescope = \"broad\"\nat_enu_m = [[0, -55], [0, 55]]\n\n"
    );
    let text = format!("{}{layout}{}{trigger}", &TINY[..start], &TINY[end..]);
    let text = text.replace("quiet_rate_hz = 1000", threshold);
    // The scan keeps the area as stated; a plan would enlarge it for its own thresholds.
    let text = text.replace("[budget]\n", "[budget]\nimpact_radius_m = 550\n");
    let text = text.replace("_showers = 64", &format!("_showers = {showers}"));
    Study::parse(Path::new("pair.toml"), &text).unwrap()
}

fn scanned(study: &Study, from_pe: f64, to_pe: f64) -> ThresholdScan {
    let (from_pe, to_pe) = (Some(from_pe), Some(to_pe));
    let request =
        ScanRequest { telescope: "broad".into(), layout: None, from_pe, to_pe, points: 5 };
    scan(study, &request, None, &()).unwrap()
}

/// With a window that holds every delay and a threshold above the noise, the scan's rate is the
/// plan's vote on the same events.
#[test]
fn verify_scan_and_plan_agree_on_common_events() {
    let study = pair("threshold_pe = 8", "", 10_000.0, 640);
    let rows = scanned(&study, 8.0, 12.0).rows;
    let planned = plan(&study, None, &()).unwrap();
    let (ours, theirs) = (rows[0].array_shower_rate_hz, planned.ranking[0].background_rate_hz);
    assert!((ours / theirs - 1.0).abs() < 1e-6, "{ours} {theirs}");
    let error = planned.ranking[0].background_rate_error_hz;
    assert!((rows[0].array_shower_rate_error_hz / error - 1.0).abs() < 1e-6);
}

/// The accidental columns are those of the noise, and every rate of showers falls with threshold.
#[test]
fn verify_scan_columns_are_the_algebra_of_the_noise() {
    let study = pair("threshold_pe = 5", "", 80.0, 160);
    let result = scanned(&study, 3.5, 6.0);
    let kind = &study.kinds[0];
    let law = Accidental::of(kind, kind.sky_photoelectrons_per_ns(&study.night_sky));
    for row in &result.rows {
        let rate = law.rate_hz(row.threshold_pe);
        assert_eq!(row.accidental_rate_hz, rate);
        assert_eq!(row.pixel_rate_hz, law.pixel_rate_hz(row.threshold_pe));
        assert_eq!(row.total_rate_hz, rate + row.shower_rate_hz);
        assert_eq!(row.array_accidental_rate_hz, array_rate_hz(&[rate; 2], 2, 80.0));
    }
    for pair in result.rows.windows(2) {
        assert!(pair[1].shower_rate_hz <= pair[0].shower_rate_hz);
        assert!(pair[1].array_shower_rate_hz <= pair[0].array_shower_rate_hz * (1.0 + 1e-12));
    }
}

/// The lowest quiet threshold keeps the rule, and one step lower breaks it: the share of
/// accidentals, or the read-out limit where that is the tighter.
#[test]
fn verify_the_quiet_threshold_is_the_lowest_that_keeps_the_rule() {
    for (trigger, share, limit) in [
        ("[trigger]\nquiet_accidental_share = 0.001\nreadout_limit_hz = 1e9\n", 0.001, 1e9),
        ("[trigger]\nquiet_accidental_share = 1\nreadout_limit_hz = 2000\n", 1.0, 2_000.0),
    ] {
        let study = pair("threshold = \"quiet\"", trigger, 80.0, 640);
        let found = scanned(&study, 3.0, 9.0).quiet.unwrap();
        let keeps = |row: &nightpool::report::ThresholdRow| {
            row.array_accidental_rate_hz <= share * row.array_shower_rate_hz
                && row.total_rate_hz <= limit
        };
        let lower = scanned(&study, found.threshold_pe - 0.05, 9.0).rows[0];
        assert!(keeps(&found), "{found:?}");
        assert!(!keeps(&lower), "{lower:?}");
    }
}

/// Telescopes 110 m apart along the azimuth of a 20 degree zenith angle see a front 125 ns apart:
/// without delay lines a window of 60 ns loses all, with them nearly nothing.
#[test]
fn verify_delays_of_inclined_showers_need_compensation() {
    let rate = |trigger: &str, window: f64| {
        let rows = scanned(&pair("threshold_pe = 8", trigger, window, 640), 8.0, 12.0).rows;
        rows[0].array_shower_rate_hz
    };
    let all = rate("", 10_000.0);
    let compensated = rate("[trigger]\ndelays = \"compensated\"\n", 60.0);
    let bare = rate("[trigger]\ndelays = \"none\"\n", 60.0);
    assert!(compensated > 0.9 * all && compensated <= all, "{compensated} of {all}");
    assert!(bare < 0.05 * all, "{bare} of {all}");
    assert!(rate("[trigger]\ndelays = \"none\"\n", 200.0) > 0.95 * all);
}

/// Under moonlight the quiet threshold rises, with the noise, and a fixed one stays.
#[test]
fn verify_quiet_thresholds_follow_the_moonlight() {
    let mut study = pair("threshold = \"quiet\"", "", 80.0, 640);
    study.moonlight.levels = vec![4.0, 16.0];
    let rows = plan(&study, None, &()).unwrap().sky_levels;
    let threshold =
        |row: usize| rows[row].threshold_pe.trim_start_matches("broad ").parse::<f64>().unwrap();
    assert_eq!(rows.len(), 3);
    // A gaussian noise of 4 times the light has twice the RMS; pulses of single photoelectrons
    // matter less as they pile up, so the ratio lies below.
    for level in 0..2 {
        let ratio = threshold(level + 1) / threshold(level);
        assert!((1.5..2.05).contains(&ratio), "{ratio}");
    }
    for row in &rows {
        assert!(row.accidental_rate_hz <= 0.011 * row.background_rate_hz, "{row:?}");
    }
}

#[test]
fn verify_the_scan_command_prints_its_columns_and_refuses_what_is_not_there() {
    let place = folder("scan");
    std::fs::write(place.join("study.toml"), TINY).unwrap();
    let run = |more: &[&str]| {
        let all = [&["scan", "study.toml", "--points", "4", "--telescope"], more].concat();
        nightpool(&place, &all)
    };
    let good = run(&["broad", "--format", "csv", "--plot", "rates.svg"]);
    let text = String::from_utf8(good.stdout).unwrap();
    assert!(text.starts_with(
        "threshold_pe,pixel_rate_hz,accidental_rate_hz,shower_rate_hz,total_rate_hz,\
         array_accidental_rate_hz,array_shower_rate_hz,shower_rate_error_hz,\
         array_shower_rate_error_hz\n"
    ));
    assert_eq!(text.lines().count(), 5);
    assert!(String::from_utf8(good.stderr).unwrap().contains("quiet threshold of broad in mixed"));
    assert!(std::fs::read_to_string(place.join("rates.svg")).unwrap().ends_with("</svg>\n"));
    for (arguments, part) in [
        (&["fat"][..], "--telescope: the study has no telescope kind `fat`; it has: broad, slim"),
        (&["slim", "--layout", "pair 70 m"], "--layout: the study has no layout `pair 70 m`"),
        (&["broad", "--from", "9", "--to", "8"], "the first must be lower"),
        (&["broad", "--from", "0"], "0.1 to 10000"),
    ] {
        let bad = run(arguments);
        let message = String::from_utf8(bad.stderr).unwrap();
        assert_eq!(bad.status.code(), Some(2), "{message}");
        assert!(message.contains(part), "{message}");
    }
}
