//! The command as users run it: what it says, what it leaves behind, how it ends.

use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Output, Stdio};

pub const TINY: &str = include_str!("../data/tiny.toml");

/// An empty folder of a test's own.
pub fn folder(name: &str) -> PathBuf {
    let folder = Path::new(env!("CARGO_TARGET_TMPDIR")).join(format!("command-{name}"));
    if folder.exists() {
        fs::remove_dir_all(&folder).unwrap();
    }
    fs::create_dir_all(&folder).unwrap();
    folder
}

pub fn nightpool(folder: &Path, arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_nightpool"))
        .current_dir(folder)
        .args(arguments)
        .output()
        .unwrap()
}

/// Names of all that is in a folder.
pub fn names(folder: &Path) -> Vec<String> {
    let entries = fs::read_dir(folder).unwrap();
    let mut names: Vec<String> =
        entries.map(|entry| entry.unwrap().file_name().into_string().unwrap()).collect();
    names.sort();
    names
}

/// Names and bytes of the files in a folder, without those of its folders.
pub fn contents(folder: &Path) -> Vec<(String, Vec<u8>)> {
    let files = names(folder).into_iter().filter(|name| folder.join(name).is_file());
    files.map(|name| (name.clone(), fs::read(folder.join(&name)).unwrap())).collect()
}

/// Runs a study that must be refused: exit code 2, every part in one message, nothing written.
fn refused(name: &str, bytes: &[u8], parts: &[&str]) {
    let folder = folder(name);
    fs::write(folder.join("study.toml"), bytes).unwrap();
    let output = nightpool(&folder, &["plan", "study.toml"]);
    let message = String::from_utf8(output.stderr).unwrap();
    assert_eq!(output.status.code(), Some(2), "{name}: {message}");
    assert!(output.stdout.is_empty(), "{name}");
    assert_eq!(message.matches("error:").count(), 1, "{name}: {message}");
    for part in parts.iter().chain(&["study.toml"]) {
        assert!(message.contains(part), "{name}: `{part}` is not in:\n{message}");
    }
    assert_eq!(names(&folder), ["study.toml"], "{name}");
}

/// The tiny study with one piece replaced.
fn with(piece: &str, replacement: &str) -> Vec<u8> {
    assert!(TINY.contains(piece), "{piece}");
    TINY.replacen(piece, replacement, 1).into_bytes()
}

/// Line of a piece of the tiny study, as messages write it.
fn line(piece: &str) -> String {
    let at = TINY.find(piece).unwrap();
    format!("study.toml:{}:", TINY[..at].matches('\n').count() + 1)
}

#[test]
fn verify_wrong_numbers_are_named_with_their_place_and_range() {
    let cases = [
        ("nan", "altitude_m = 2200", "altitude_m = nan", "`site.altitude_m` = nan: is not finite"),
        ("inf", "altitude_m = 2200", "altitude_m = inf", "a number from -400 to 6000 (m)"),
        ("huge", "altitude_m = 2200", "altitude_m = 1e999", "site.altitude_m"),
        ("high", "altitude_m = 2200", "altitude_m = 9000", "9000: is too large"),
        ("text", "altitude_m = 2200", "altitude_m = \"2200 m\"", "is a text; write a number"),
        (
            "area",
            "mirror_area_m2 = 100",
            "mirror_area_m2 = -100",
            "`telescope[1].mirror_area_m2` = -100: is too small; write a number from 0.1 to 5000 (m2)",
        ),
        ("south", "latitude_deg = 20", "latitude_deg = -91", "-90 to 90 (degrees north)"),
        ("count", "connected_pixels = 3", "connected_pixels = 3.5", "a whole number from 1 to 32"),
        ("minus", "gamma_showers = 64", "gamma_showers = -5", "a whole number from 16"),
        ("group", "connected_pixels = 3", "connected_pixels = 0", "from 1 to 32"),
        ("compact", "connected_pixels = 3", "compact_pixels = 5", "a whole number from 1 to 4"),
        (
            "both",
            "connected_pixels = 3",
            "majority_pixels = 2\nconnected_pixels = 3",
            "write one of",
        ),
        ("clip", "connected_pixels = 3", "patch_clip_pe = 0", "from 0.1 to 1000"),
        ("cross", "connected_pixels = 3", "crosstalk = 0.9\nconnected_pixels = 3", "from 0 to 0.4"),
        ("zenith", "zenith_deg = 20", "zenith_deg = 85", "from 0 to 70 (degrees)"),
    ];
    for (name, piece, replacement, part) in cases {
        refused(name, &with(piece, replacement), &[&line(piece), part]);
    }
}

#[test]
fn verify_wrong_keys_are_named_with_what_was_meant() {
    let piece = "altitude_m = 2200";
    let meant = "`site.altitude_ft`: unknown key; write `altitude_m`";
    refused("unit", &with(piece, "altitude_ft = 7200"), &[&line(piece), meant]);
    refused("bare", &with(piece, "altitude = 7200"), &[&line(piece), "write `altitude_m`"]);
    let missing = "`site.altitude_m`: missing from site; write a number from -400 to 6000 (m)";
    refused("missing", &with("altitude_m = 2200\n", ""), &[&line("[site]"), missing]);
    let extra = with(piece, "altitude_m = 2200\ncolour = 1");
    refused("extra", &extra, &["`site.colour`: unknown key", "latitude_deg"]);
    let pitch = with("pixel_pitch_deg = 0.2\n", "pixel_pitch_degs = 0.2\n");
    refused("plural", &pitch, &["`telescope[1].pixel_pitch_degs`", "write `pixel_pitch_deg`"]);
    refused("section", &with("[budget]", "[budgets]"), &["`budgets`", "write `budget`"]);
    refused("empty", b"", &["`site`: missing from the study"]);
}

#[test]
fn verify_wrong_choices_list_what_there_is() {
    let cases = [
        ("air", "profile = \"us1976\"", "profile = \"mars\"", "us1976"),
        ("engine", "engine = \"profile\"", "engine = \"profil\"", "did you mean \"profile\"?"),
        ("spectrum", "\"crab-hegra-2004\"", "\"crabby\"", "crab-hess-2006"),
        ("primary", "primary = \"proton\"", "primary = \"prion\"", "helium"),
        ("kind", "telescope = \"slim\"", "telescope = \"fat\"", "\"broad\", \"slim\""),
        ("pattern", "pattern = \"line\"", "pattern = \"spiral\"", "\"hexagon\""),
    ];
    for (name, piece, replacement, part) in cases {
        refused(name, &with(piece, replacement), &[&line(piece), part]);
    }
}

#[test]
fn verify_layouts_that_cannot_be_built_are_refused() {
    let piece = "at_enu_m = [[80, 0], [0, 80]]";
    let spot = with(piece, "at_enu_m = [[80, 0], [80, 0]]");
    refused("spot", &spot, &[&line(piece), "two telescopes stand on one spot: [80, 0]"]);
    let across = with(piece, "at_enu_m = [[3, 0], [0, 80]]");
    refused("mirrors", &across, &[&line(piece), "their mirrors need at least 8.5 m"]);
    let start = TINY.find("[[layout]]").unwrap();
    let end = TINY.find("[pointing]").unwrap();
    let none = format!("{}{}", &TINY[..start], &TINY[end..]);
    refused("none", none.as_bytes(), &["`layout`: missing", "[[layout_family]]"]);
    let scan = "spacings_m = [70, 110]";
    refused("scan", &with(scan, "spacings_m = []"), &[&line(scan), "is empty"]);
    refused("close", &with(scan, "spacings_m = [70, 5]"), &[&line(scan), "at 5 m"]);
    let required = "telescopes_required = 2";
    let many = with(required, "telescopes_required = 4");
    refused("required", &many, &[&line(required), "a whole number from 1 to 3"]);
    let outside = with(
        "altitude_m = 2200",
        "altitude_m = 2200\nboundary_enu_m = [[-9, -9], [100, -9], [0, 60]]",
    );
    refused("outside", &outside, &["[0.0, 80.0] lies outside the site's boundary"]);
}

#[test]
fn verify_absurd_budgets_are_refused() {
    let piece = "gamma_showers = 64";
    refused(
        "showers",
        &with(piece, "gamma_showers = 100_000_000_000"),
        &[&line(piece), "100000000"],
    );
    let events = with(piece, "gamma_showers = 90_000_000");
    refused("events", &events, &[&line(piece), "array events; at most 500000000 are allowed"]);
}

#[test]
fn verify_files_that_are_no_studies_are_refused() {
    refused("toml", &with("[site]", "[site"), &[&line("[site]"), "is not valid TOML"]);
    refused("twice", &with("seed = 3", "seed = 3\nseed = 4"), &["is not valid TOML", "seed"]);
    refused(
        "latin",
        &with("Test pad", "Test \u{1}")
            .iter()
            .map(|b| if *b == 1 { 0xe9 } else { *b })
            .collect::<Vec<u8>>(),
        &["line 7 is not UTF-8"],
    );
    refused("large", &vec![b'#'; 100_000_000], &["larger than 8 MiB"]);
    let folder = folder("paths");
    fs::create_dir(folder.join("inner.toml")).unwrap();
    for (argument, part) in [("inner.toml", "is a folder"), ("absent.toml", "cannot be read")] {
        let output = nightpool(&folder, &["plan", argument]);
        let message = String::from_utf8(output.stderr).unwrap();
        assert_eq!(output.status.code(), Some(2), "{message}");
        assert!(message.contains(part) && message.contains(argument), "{message}");
    }
    let sensor = "threshold_pe = 5";
    let absent = with(sensor, "threshold_pe = 5\nsensor_file = \"absent.csv\"");
    refused("sensor", &absent, &["telescope[2].sensor_file", "absent.csv", "cannot be read"]);
}

#[test]
fn verify_destinations_that_cannot_be_written_are_refused() {
    let folder = folder("destination");
    fs::write(folder.join("study.toml"), TINY).unwrap();
    for out in ["study.toml", "study.toml/inside", "/proc/nowhere"] {
        let output = nightpool(&folder, &["plan", "study.toml", "--out", out]);
        let message = String::from_utf8(output.stderr).unwrap();
        assert_eq!(output.status.code(), Some(2), "{out}: {message}");
        assert!(message.contains(out) && message.contains("name a folder"), "{message}");
    }
    assert_eq!(names(&folder), ["study.toml"]);
}

#[test]
fn verify_wrong_arguments_end_with_code_2_and_help_with_0() {
    let folder = folder("arguments");
    for arguments in [&["plan"][..], &["plan", "a", "--threads", "0"], &["fly"], &[]] {
        assert_eq!(nightpool(&folder, arguments).status.code(), Some(2), "{arguments:?}");
    }
    for arguments in [&["--help"][..], &["--version"], &["plan", "--help"]] {
        assert_eq!(nightpool(&folder, arguments).status.code(), Some(0), "{arguments:?}");
    }
}

#[test]
fn verify_tables_are_the_same_bytes_for_any_number_of_threads() {
    let folder = folder("threads");
    fs::write(folder.join("study.toml"), TINY).unwrap();
    for threads in ["1", "2", "8"] {
        let out = format!("out{threads}");
        let arguments = ["plan", "study.toml", "--out", &out, "--threads", threads, "--quiet"];
        let output = nightpool(&folder, &arguments);
        assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
        assert!(output.stdout.is_empty() && output.stderr.is_empty());
    }
    let first = contents(&folder.join("out1"));
    assert!(first.len() >= 12);
    for (name, bytes) in &first {
        let of = |out: &str| fs::read(folder.join(out).join(name)).unwrap();
        assert!(*bytes == of("out2"), "{name}: 2 threads");
        assert!(*bytes == of("out8"), "{name}: 8 threads");
    }
    let other = ["plan", "study.toml", "--out", "other", "--seed", "4", "--json"];
    let output = nightpool(&folder, &other);
    let json: serde_json::Value = serde_json::from_slice(&output.stdout).unwrap();
    assert_eq!((&json["seed"], json["ranking"].as_array().unwrap().len()), (&4.into(), 3));
    let table = |out: &str| fs::read(folder.join(out).join("effective_area.csv")).unwrap();
    assert!(table("out1") != table("other"), "another seed gives other numbers");
}

#[test]
fn verify_an_interrupted_run_leaves_earlier_outputs_whole() {
    let folder = folder("interrupt");
    fs::write(folder.join("study.toml"), TINY).unwrap();
    let arguments = ["plan", "study.toml", "--out", "out", "--quiet"];
    assert!(nightpool(&folder, &arguments).status.success());
    let out = folder.join("out");
    let read = || contents(&out);
    let before = read();
    let large = TINY.replace("_showers = 64", "_showers = 100_000");
    fs::write(folder.join("large.toml"), large).unwrap();
    let mut child = Command::new(env!("CARGO_BIN_EXE_nightpool"))
        .current_dir(&folder)
        .args(["plan", "large.toml", "--out", "out", "--quiet"])
        .stderr(Stdio::null())
        .spawn()
        .unwrap();
    std::thread::sleep(core::time::Duration::from_millis(700));
    assert!(child.try_wait().unwrap().is_none(), "the large run ended before it was interrupted");
    child.kill().unwrap();
    child.wait().unwrap();
    assert!(read() == before);
}

/// `air` prints the standard atmosphere under its columns; unknown names and bare numbers are
/// refused with exit code 2.
#[test]
fn verify_air_prints_its_columns_and_refuses_what_it_cannot_read() {
    let run = |arguments: &[&str]| {
        Command::new(env!("CARGO_BIN_EXE_nightpool")).args(arguments).output().unwrap()
    };
    let out = run(&["air", "us1976", "--altitude", "0m,11km", "--format", "csv"]);
    let text = String::from_utf8(out.stdout).unwrap();
    let lines: Vec<&str> = text.lines().collect();
    let columns = "altitude_m,temperature_k,pressure_pa,density_kg_m3,depth_g_cm2,refractivity,\
                   cherenkov_angle_deg,electron_threshold_mev,muon_threshold_gev,\
                   pion_threshold_gev,proton_threshold_gev";
    assert_eq!(lines[0], columns);
    assert!(lines.len() == 3 && lines[1].starts_with("0,288.15,"), "{text}");
    for wrong in [&["air", "mars"][..], &["air", "us1976", "--altitude", "3"]] {
        let out = run(wrong);
        assert_eq!(out.status.code(), Some(2), "{wrong:?}");
        assert!(out.stdout.is_empty() && !out.stderr.is_empty());
    }
}
