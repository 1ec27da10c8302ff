//! `search` as users run it.

use std::fs;
use std::path::Path;
use std::process::Command;

use crate::command::{TINY, contents, folder, names, nightpool};

/// The tiny study on a square of ground.
fn study(folder: &Path) {
    let ground = "altitude_m = 2200\nboundary_enu_m = [[-160, -150], [150, -150], [150, 150], [-150, 150]]\n\
                  [[site.exclusion]]\nname = \"pond\"\noutline_enu_m = [[20, 20], [60, 20], [60, 60]]";
    fs::write(folder.join("study.toml"), TINY.replacen("altitude_m = 2200", ground, 1)).unwrap();
}

#[test]
fn verify_a_search_gives_the_same_files_for_any_number_of_threads_and_from_its_table() {
    let folder = folder("search-threads");
    study(&folder);
    let run = |out: &str, more: &[&str]| {
        let first = ["search", "study.toml", "--telescopes", "3", "--out", out];
        let output = nightpool(&folder, &[&first[..], more].concat());
        assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
        String::from_utf8(output.stdout).unwrap()
    };
    let shared = ["--table", "table", "--quiet"];
    assert_eq!(run("one", &[&shared[..], &["--threads", "1"]].concat()), "");
    assert_eq!(run("four", &[&shared[..], &["--threads", "4"]].concat()), "");
    let results = contents(&folder.join("one"));
    for name in ["front.csv", "front.parquet", "build_up.csv", "build_up.parquet", "report.html"] {
        assert!(results.iter().any(|(found, _)| found == name), "{name}");
    }
    assert!(contents(&folder.join("four")) == results);
    // Two and three telescopes; the rate rises with their number, and each stage adds to it.
    let text = String::from_utf8(fs::read(folder.join("one/front.csv")).unwrap()).unwrap();
    let rows: Vec<Vec<&str>> = text.lines().skip(1).map(|row| row.split(',').collect()).collect();
    assert_eq!(rows.iter().map(|row| row[0]).collect::<Vec<_>>(), ["2", "3"]);
    let rate = |row: &[&str]| row[3].parse::<f64>().unwrap();
    assert!(rate(&rows[1]) > rate(&rows[0]) && rate(&rows[0]) > 0.0);
    let stages = String::from_utf8(fs::read(folder.join("one/build_up.csv")).unwrap()).unwrap();
    assert_eq!(stages.lines().count(), 1 + 2 + 3);
    // Another seed is another search; the ranking as JSON names its layouts.
    let json = run("json", &["--json", "--seed", "8", "--table", "table"]);
    let json: serde_json::Value = serde_json::from_str(&json).unwrap();
    assert_eq!(json["ranking"].as_array().unwrap().len(), 2);
    assert!(contents(&folder.join("json")) != results);
}

#[test]
fn verify_searches_that_cannot_be_are_refused() {
    let folder = folder("search-refused");
    study(&folder);
    fs::write(folder.join("bare.toml"), TINY).unwrap();
    let cases: [(&[&str], &str); 5] = [
        (&["bare.toml"], "boundary_enu_m"),
        (&["study.toml", "--required", "5"], "--required"),
        (&["study.toml", "--budget", "0"], "--budget"),
        (&["study.toml", "--pad-spacing", "80"], "--pad-spacing"),
        (&["study.toml", "--pad-spacing", "900m"], "pads"),
    ];
    for (arguments, part) in cases {
        let output = nightpool(&folder, &[&["search"], arguments].concat());
        let message = String::from_utf8(output.stderr).unwrap();
        assert_eq!(output.status.code(), Some(2), "{arguments:?}: {message}");
        assert!(message.contains(part), "{message}");
    }
    assert_eq!(names(&folder), ["bare.toml", "study.toml"]);
}

#[cfg(unix)]
#[test]
fn verify_an_interrupted_search_writes_its_best_so_far() {
    let folder = folder("search-interrupted");
    study(&folder);
    // Far more work than the test waits for.
    let more = ["--telescopes", "60", "--pad-spacing", "20m", "--out", "out", "--quiet"];
    let mut child = Command::new(env!("CARGO_BIN_EXE_nightpool"))
        .current_dir(&folder)
        .args(["search", "study.toml"])
        .args(more)
        .spawn()
        .unwrap();
    let listed = || {
        let tables = fs::read_dir(folder.join("out/table")).into_iter().flatten().flatten();
        tables.into_iter().any(|table| table.path().join("table.json").exists())
    };
    while !listed() {
        assert!(child.try_wait().unwrap().is_none(), "it ended by itself");
        std::thread::sleep(core::time::Duration::from_millis(50));
    }
    std::thread::sleep(core::time::Duration::from_millis(700));
    let sent = Command::new("kill").args(["-INT", &child.id().to_string()]).status().unwrap();
    assert!(sent.success());
    assert_eq!(child.wait().unwrap().code(), Some(130));
    let expected = ["build_up.csv", "build_up.parquet", "front.csv", "front.parquet", "table"];
    assert_eq!(names(&folder.join("out")), expected);
    let front = fs::read_to_string(folder.join("out/front.csv")).unwrap();
    assert!(front.lines().count() >= 2, "{front}");
}

/// A report's map is a study's list of layouts: the same layouts at the same places, to the
/// millimetre; images are drawn anew for a millimetre's change, showers are not.
#[test]
fn verify_a_study_takes_its_layouts_from_the_map_of_a_report() {
    let folder = folder("layouts-file");
    let tiny = TINY.replace("gamma_showers = 64", "gamma_showers = 640");
    fs::write(folder.join("study.toml"), &tiny).unwrap();
    let start = tiny.find("[[layout]]").unwrap();
    let end = tiny.find("[pointing]").unwrap();
    let from = "layouts_file = \"out/layouts.geojson\"\n";
    let imported = format!("{from}{}{}", &tiny[..start], &tiny[end..]);
    fs::write(folder.join("imported.toml"), &imported).unwrap();
    let rates = |study: &str, out: &str| {
        let output = nightpool(&folder, &["plan", study, "--out", out, "--json"]);
        assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
        let json: serde_json::Value = serde_json::from_slice(&output.stdout).unwrap();
        let rows = json["ranking"].as_array().unwrap().iter();
        let mut rows: Vec<(String, f64)> = rows
            .map(|row| (row["layout"].to_string(), row["gamma_rate_hz"].as_f64().unwrap()))
            .collect();
        rows.sort_by(|a, b| a.0.cmp(&b.0));
        rows
    };
    let (first, second) = (rates("study.toml", "out"), rates("imported.toml", "again"));
    assert_eq!(first.len(), second.len());
    for (a, b) in first.iter().zip(&second) {
        assert_eq!(a.0, b.0);
        assert!((a.1 / b.1 - 1.0).abs() < 0.1, "{a:?} {b:?}");
    }
    fs::write(folder.join("wrong.toml"), imported.replace("slim", "thin")).unwrap();
    let output = nightpool(&folder, &["plan", "wrong.toml"]);
    let message = String::from_utf8(output.stderr).unwrap();
    assert_eq!(output.status.code(), Some(2), "{message}");
    assert!(message.contains("layouts_file") && message.contains("slim"), "{message}");
}
