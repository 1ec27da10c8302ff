//! What a plan says beside its ranking: sources, assumptions, single events, directions, what
//! stands already.

use std::path::Path;

use nightpool::plan::plan;
use nightpool::report::PlanResult;
use nightpool::study::Study;

use crate::command::TINY;

fn planned(change: impl Fn(String) -> String) -> PlanResult {
    let study = Study::parse(Path::new("tiny.toml"), &change(TINY.to_owned())).unwrap();
    plan(&study, None, &()).unwrap()
}

fn more_sources(text: String) -> String {
    let reference = "[[source]]\nname = \"reference\"\nspectrum = \"crab-hegra-2004\"\n";
    assert!(text.contains(reference));
    let own = |name: &str, index: f64| {
        format!("[[source]]\nname = \"{name}\"\nflux_m2_s_tev = 1e-6\nindex = {index}\n")
    };
    let text = text.replace("gamma_showers = 64", "gamma_showers = 1_600");
    text.replace(reference, &format!("{reference}{}{}", own("soft", 3.5), own("hard", 2.0)))
}

#[test]
fn verify_a_plan_checks_its_ranking() {
    let robust = "\n[robustness]\nprofile = \"tropical\"\nshowers_share = 0.5\n\
                  [costs]\nper_pad = 0.5\nmirror_area_m2_and_cost = [100, 2]\n";
    let result = planned(|text| more_sources(text) + robust);
    // Three sources of three layouts; the reference's rates are those of the ranking; a harder
    // source has the higher threshold.
    assert_eq!(result.sources.len(), 9);
    for row in &result.ranking {
        let of = |source: &str| {
            let same =
                |s: &&nightpool::report::SourceRow| s.source == source && s.layout == row.layout;
            result.sources.iter().find(same).unwrap()
        };
        assert!((of("reference").gamma_rate_hz / row.gamma_rate_hz - 1.0).abs() < 1e-9);
        assert!(of("soft").threshold_gev < of("hard").threshold_gev);
        assert!((row.rate_per_cost_hz * row.cost / row.gamma_rate_hz - 1.0).abs() < 1e-9);
        assert!(row.data_gb_per_night > 0.0);
    }
    // Two telescopes of 100 m2 at the price of the law, and their pads.
    let pair = result.ranking.iter().find(|row| row.layout == "pair 70 m").unwrap();
    assert!((pair.cost - 5.0).abs() < 1e-9, "{}", pair.cost);
    // Less light, more sky: fewer triggers; more light: more.
    let ratios = |part: &str| {
        let rows = result.orders.iter().filter(move |row| row.assumption.contains(part));
        let rows: Vec<f64> = rows.map(|row| row.ratio).collect();
        assert_eq!(rows.len(), 3, "{part}");
        rows
    };
    assert!(ratios("0.85").iter().all(|ratio| (0.5..0.97).contains(ratio)));
    assert!(ratios("1.15").iter().all(|ratio| (1.03..1.5).contains(ratio)));
    assert!(ratios("sky noise x 2").iter().all(|ratio| (0.5..1.02).contains(ratio)));
    assert!(ratios("air tropical").iter().all(|ratio| (0.6..1.4).contains(ratio)));
    assert_eq!(result.order_changes.len(), 4);
    // A window takes away, accidental triggers add; downtime takes away, and for pairs exactly
    // the square of the probability to be up.
    for row in &result.finalists {
        assert!(row.gamma_window_hz <= row.gamma_vote_hz * (1.0 + 1e-9));
        assert!(row.gamma_window_hz > 0.98 * row.gamma_vote_hz, "80 ns are many");
        assert!(row.gamma_with_noise_hz >= row.gamma_window_hz);
        if row.layout.starts_with("pair") {
            let expected = row.gamma_vote_hz * 0.95_f64.powi(2);
            assert!((row.gamma_expected_hz / expected - 1.0).abs() < 1e-9);
        }
    }
    // Directions of stereo images are known to better than the camera's size.
    let good = |row: &&nightpool::report::DirectionRow| row.containment_68_deg.is_finite();
    assert!(result.directions.iter().filter(good).count() >= 6);
    for row in result.directions.iter().filter(good) {
        assert!((0.02..1.0).contains(&row.containment_68_deg), "{row:?}");
        assert!(row.events <= row.triggered);
    }
}

#[test]
fn verify_telescopes_that_stand_are_in_every_layout_and_cost_nothing() {
    let built =
        "[[built]]\ntelescope = \"broad\"\nat_enu_m = [[0, 200]]\n\n[[layout]]\nname = \"mixed\"";
    let costs = "\n[costs]\nmirror_area_m2_and_cost = [100, 1]\n";
    let with = |text: String| text.replace("[[layout]]\nname = \"mixed\"", built) + costs;
    let result = planned(with);
    for row in &result.ranking {
        let map = result.maps.iter().find(|map| map.layout == row.layout).unwrap();
        let stands =
            |t: &&nightpool::report::PlacedTelescope| (t.east_m, t.north_m) == (0.0, 200.0);
        assert_eq!(map.telescopes.iter().filter(stands).count(), 1);
    }
    let pair = result.ranking.iter().find(|row| row.layout == "pair 70 m").unwrap();
    assert_eq!((pair.telescopes, pair.cost), (3, 2.0));
}

#[test]
fn verify_a_scan_of_mirror_areas_is_a_kind_each() {
    let scan = "spacings_m = [70, 110]\nmirror_areas_m2 = [50, 100, 200]";
    let text = TINY.replace("spacings_m = [70, 110]", scan);
    let text = text.replace("quiet_rate_hz = 1000", "quiet_rate_hz = 1000\ncost = 1");
    let study = Study::parse(Path::new("scan.toml"), &text).unwrap();
    assert_eq!((study.kinds.len(), study.layouts.len()), (5, 7));
    for layout in study.layouts.iter().filter(|layout| layout.name != "mixed") {
        let scan = layout.scan.as_ref().unwrap();
        let kind = &study.kinds[layout.telescopes[0].kind];
        assert_eq!((kind.mirror_area_m2, scan.family.as_str()), (scan.mirror_area_m2, "pair"));
        // The power law of the cost in mirror area.
        assert!((kind.cost - (kind.mirror_area_m2 / 100.0).powf(1.35)).abs() < 1e-12);
        let [a, b] = [0, 1].map(|telescope: usize| layout.telescopes[telescope].enu_m);
        assert!(((a[0] - b[0]).hypot(a[1] - b[1]) - scan.spacing_m).abs() < 1e-9);
    }
}

#[test]
fn verify_numbers_are_scanned_and_the_same_layout_is_counted_once() {
    let family = "[[layout_family]]\nname = \"pair\"\ntelescope = \"broad\"\npattern = \"line\"\n\
                  telescopes = 2";
    assert!(TINY.contains(family));
    let numbers = family.replace("telescopes = 2", "telescope_numbers = [2, 3]");
    let again = "\n[[layout]]\nname = \"by hand\"\n[[layout.stand]]\ntelescope = \"broad\"\n\
                 at_enu_m = [[35, 0], [-35, 0]]\n\n[pointing]";
    let text = TINY.replace(family, &numbers).replace("[pointing]", again);
    let study = Study::parse(Path::new("numbers.toml"), &text).unwrap();
    let names: Vec<&str> = study.layouts.iter().map(|layout| layout.name.as_str()).collect();
    let line = ["pair of 2 70 m", "pair of 2 110 m", "pair of 3 70 m", "pair of 3 110 m"];
    assert_eq!(names[..2], ["mixed", "by hand"]);
    assert_eq!(names[2..], line);
    // Without a scan the one by hand and the one of the family are one.
    let plain = family.replace("telescopes = 2", "telescopes = 2\nturn_deg = 0");
    let text = TINY.replace(family, &plain).replace("[70, 110]", "[70]");
    let study = Study::parse(Path::new("twice.toml"), &text.replace("[pointing]", again)).unwrap();
    assert_eq!(study.left_out, [["pair 70 m".to_owned(), "by hand".to_owned()]]);
    assert_eq!(study.layouts.len(), 2);
    // Turned by a quarter it is another one under a tilted pointing and the same under a vertical.
    let text = text.replace("turn_deg = 0", "turn_deg = 90").replace("[pointing]", again);
    let tilted = Study::parse(Path::new("turned.toml"), &text).unwrap();
    let upright = text.replace("zenith_deg = 20", "zenith_deg = 0");
    let upright = Study::parse(Path::new("upright.toml"), &upright).unwrap();
    assert_eq!((tilted.layouts.len(), upright.layouts.len()), (3, 2));
}
