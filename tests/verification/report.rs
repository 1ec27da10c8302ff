//! The report's files, from a made-up result.

use nightpool::report::{
    Approximation, AreaRow, Counter, KindRow, LayoutMap, LayoutRow, Model, PlacedTelescope,
    PlanResult, PoolReach, PoolRow, Provenance, RateRow, ScanRow, SiteSummary, files, write_all,
};

fn text(files: &[(String, Vec<u8>)], name: &str) -> String {
    let (_, bytes) = files.iter().find(|(file, _)| file == name).expect(name);
    String::from_utf8(bytes.clone()).expect("the file is text")
}

/// Thirteen layouts whose numbers follow simple laws; nothing here is physics.
fn made_up() -> PlanResult {
    let mut result = PlanResult {
        provenance: Provenance {
            study: "made-up".into(),
            title: "A made-up <result> & its charts".into(),
            study_checksum: "ab".repeat(32),
            version: "0.0.0".into(),
            seed: 7,
            engine: "profile".into(),
            score: "gamma_rate_hz".into(),
            resamples: 400,
            simulated: vec![("gamma".into(), 2_000, 128_000), ("proton".into(), 4_000, 256_000)],
            models: vec![Model { purpose: "test".into(), citation: "Nobody 1900".into() }],
        },
        site: SiteSummary {
            name: "Nowhere".into(),
            latitude_deg: -24.5,
            longitude_deg: 17.25,
            altitude_m: 2_200.0,
            depth_g_cm2: 795.0,
            cutoff_gv: 9.5,
            zenith_deg: 20.0,
            azimuth_deg: 180.0,
            boundary_enu_m: vec![
                [-320.0, -260.0],
                [300.0, -280.0],
                [240.0, 290.0],
                [-180.0, 300.0],
            ],
            exclusions_enu_m: vec![vec![[180.0, -200.0], [260.0, -180.0], [220.0, -90.0]]],
            control_house_enu_m: Some([-20.0, -225.0]),
        },
        kinds: ["broad", "slim"].map(kind).into(),
        counters: vec![Counter { name: "age outside table".into(), count: 3, of: 1_000_000 }],
        warnings: vec!["The numbers are made up.".into()],
        approximations: vec![Approximation { what: "Everything".into(), size: "all of it".into() }],
        ..PlanResult::default()
    };
    for index in 0..13 {
        add_layout(&mut result, index);
    }
    for index in 0..12 {
        let (area, spacing) = (f64::from(index / 4 + 1) * 40.0, f64::from(index % 4 + 1) * 50.0);
        result.scans.push(ScanRow {
            family: "squares <made up>".into(),
            mirror_area_m2: area,
            spacing_m: spacing,
            layout: format!("square {index}"),
            score: 0.01 * area - 0.000_02 * (spacing - 100.0).powi(2),
            score_error: 0.02,
            behind_best: f64::from(index) / 12.0,
        });
    }
    let (half_m, tenth_m) = (160.0, 320.0);
    result.reach = Some(PoolReach { energy_gev: 80.0, inner_photons_m2: 9.0, half_m, tenth_m });
    for (primary, energy) in [("gamma", 100.0), ("gamma", 1e3), ("gamma", 1e4), ("proton", 1e3)] {
        for step in 0..40 {
            let distance = 10.0 * f64::from(step) + 5.0;
            let hump = 1.0 + 0.5 * (-((distance - 115.0) / 25.0_f64).powi(2)).exp();
            let photons = 0.1 * energy * hump / (1.0 + (distance / 150.0).powi(4));
            result.light_pool.push(PoolRow {
                primary: primary.into(),
                energy_gev: energy,
                distance_m: distance,
                photons_m2: if primary == "proton" { 0.35 * photons } else { photons },
                error_m2: 0.03 * photons,
                spread_m2: 0.5 * photons,
                kind: "broad".into(),
                photoelectrons: 12.0 * photons,
            });
        }
    }
    result
}

fn kind(name: &str) -> KindRow {
    KindRow {
        kind: name.into(),
        mirror_area_m2: if name == "broad" { 98.0 } else { 26.0 },
        pixels: 700,
        pixel_pitch_deg: 0.16,
        field_of_view_deg: 4.6,
        sky_pe_per_ns: 0.12,
        threshold_pe: 5.2,
        threshold_choice: "lowest quiet".into(),
        accidental_rate_hz: 980.0,
        topology: "3 connected pixels".into(),
    }
}

fn add_layout(result: &mut PlanResult, index: usize) {
    let name = format!(
        "{} {}",
        if index.is_multiple_of(2) { "broad four" } else { "slim nine" },
        index * 10
    );
    let rate = 0.6 - 0.035 * index as f64;
    result.ranking.push(LayoutRow {
        rank: index + 1,
        tier: index / 3 + 1,
        layout: name.clone(),
        telescopes: 4,
        kinds: "4 × broad".into(),
        condition: 2,
        mirror_area_m2: 392.0,
        gamma_rate_hz: rate,
        gamma_rate_error_hz: 0.02,
        background_rate_hz: 900.0 * rate,
        background_rate_error_hz: 40.0,
        threshold_gev: 100.0 + 10.0 * index as f64,
        threshold_error_gev: 6.0,
        accidental_rate_hz: if index == 12 { f64::NAN } else { 1e-3 },
        gamma_rate_per_hour: 3_600.0 * rate,
        dead_fraction: 0.0,
        cost: 12.4,
        rate_per_cost_hz: 0.1,
        rate_per_root_background: 0.02,
        data_gb_per_night: 40.0,
        order_probability: 0.87,
        score: rate,
        score_error: 0.02,
    });
    for bin in 0..24 {
        let low = 10.0_f64.powf(1.0 + 0.15 * f64::from(bin));
        let high = 10.0_f64.powf(1.15 + 0.15 * f64::from(bin));
        let turn_on = 1.0 / (1.0 + (100.0 / low).powi(4));
        let area = if bin < 2 { 0.0 } else { 8e4 * turn_on * low.powf(0.25) * rate };
        result.effective_areas.push(AreaRow {
            layout: name.clone(),
            primary: "gamma".into(),
            energy_low_gev: low,
            energy_high_gev: high,
            area_m2: area,
            error_m2: 0.1 * area,
        });
        result.differential_rates.push(RateRow {
            layout: name.clone(),
            primary: "reference".into(),
            energy_low_gev: low,
            energy_high_gev: high,
            rate_hz_gev: area * 3e-7 * low.powf(-2.6),
            error_hz_gev: area * 3e-8 * low.powf(-2.6),
        });
    }
    let side = 40.0 + 8.0 * index as f64;
    let stand = |east: f64, north: f64, area: f64| PlacedTelescope {
        kind: if area > 50.0 { "broad".into() } else { "slim".into() },
        mirror_area_m2: area,
        east_m: side * east,
        north_m: side * north,
        up_m: 0.0,
    };
    let telescopes = vec![
        stand(-1.0, -1.0, 98.0),
        stand(1.0, -1.0, 98.0),
        stand(1.0, 1.0, 26.0),
        stand(-1.0, 1.0, 26.0),
    ];
    result.maps.push(LayoutMap { layout: name, telescopes });
}

#[test]
fn verify_every_file_is_made_and_names_its_columns() {
    let files = files(&made_up()).unwrap();
    let head = text(&files, "ranking.csv").lines().next().unwrap().to_owned();
    for column in [
        "rank",
        "layout",
        "telescopes",
        "gamma_rate_hz",
        "gamma_rate_error_hz",
        "background_rate_hz",
        "background_rate_error_hz",
        "threshold_gev",
    ] {
        assert!(head.split(',').any(|name| name == column), "{column} in {head}");
    }
    assert_eq!(text(&files, "ranking.csv").lines().count(), 14);
    assert_eq!(text(&files, "effective_area.csv").lines().count(), 1 + 13 * 24);
    for (name, bytes) in &files {
        assert!(!bytes.is_empty(), "{name}");
        if name.ends_with(".parquet") {
            assert!(bytes.starts_with(b"PAR1") && bytes.ends_with(b"PAR1"), "{name}");
        }
    }
}

#[test]
fn verify_charts_are_svg_without_broken_numbers() {
    for (name, bytes) in files(&made_up()).unwrap() {
        if name.ends_with(".svg") {
            let svg = String::from_utf8(bytes).unwrap();
            assert!(svg.starts_with("<svg ") && svg.trim_end().ends_with("</svg>"), "{name}");
            assert!(svg.contains("viewBox") && svg.contains("178mm"), "{name}");
            assert!(!svg.contains("NaN") && !svg.contains("inf"), "{name}");
        }
    }
}

#[test]
fn verify_charts_of_an_empty_result_are_drawn() {
    let files = files(&PlanResult::default()).unwrap();
    assert!(text(&files, "report.html").contains("No layout was ranked"));
}

#[test]
fn verify_the_page_stands_alone_and_escapes_what_users_write() {
    let page = text(&files(&made_up()).unwrap(), "report.html");
    assert!(page.contains("A made-up &lt;result&gt; &amp; its charts"));
    for outside in ["<script", "<link", "src=", "url(", "@import"] {
        assert!(!page.contains(outside), "{outside}");
    }
    assert!(page.contains(&"ab".repeat(32)) && page.contains("Nobody 1900"));
    assert!(page.contains("Sunlight") && page.contains("licensed engineers"));
}

#[test]
fn verify_run_json_and_geojson_are_json() {
    let files = files(&made_up()).unwrap();
    let run: serde_json::Value = serde_json::from_str(&text(&files, "run.json")).unwrap();
    assert_eq!(run["seed"], 7);
    assert_eq!(run["counters"][0]["count"], 3);
    let map: geojson::GeoJson = text(&files, "layouts.geojson").parse().unwrap();
    let geojson::GeoJson::FeatureCollection(map) = map else { panic!("a collection") };
    assert_eq!(map.features.len(), 2 + 13 * 4);
}

#[test]
fn verify_a_report_replaces_an_earlier_one_and_leaves_nothing_behind() {
    let folder = std::path::Path::new(env!("CARGO_TARGET_TMPDIR")).join("report-files");
    let _ = std::fs::remove_dir_all(&folder);
    let result = made_up();
    write_all(&folder, &result).unwrap();
    write_all(&folder, &result).unwrap();
    let mut names: Vec<String> = std::fs::read_dir(&folder)
        .unwrap()
        .map(|entry| entry.unwrap().file_name().into_string().unwrap())
        .collect();
    names.sort();
    let mut expected: Vec<String> =
        files(&result).unwrap().into_iter().map(|(name, _)| name).collect();
    expected.sort();
    assert_eq!(names, expected);
}
