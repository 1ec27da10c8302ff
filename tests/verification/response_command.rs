//! The stored table as users meet it: read again, extended, refused, rebuilt.

use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};

use crate::command::{TINY, contents, folder, names, nightpool};

/// Runs `plan` on a study of a folder, with the table `table`; what it said.
fn plan(folder: &Path, study: &str, out: &str, more: &[&str]) -> (Option<i32>, String) {
    let arguments = ["plan", study, "--out", out, "--table", "table", "--quiet"];
    let output = nightpool(folder, &[&arguments[..], more].concat());
    (output.status.code(), String::from_utf8(output.stderr).unwrap())
}

/// The only table of a folder of tables.
fn only_table(folder: &Path) -> PathBuf {
    let tables = names(&folder.join("table"));
    assert_eq!(tables.len(), 1, "{tables:?}");
    folder.join("table").join(&tables[0])
}

#[test]
fn verify_a_table_is_read_again_and_extended_and_changes_no_result() {
    let folder = folder("table-again");
    // One layout less; fewer showers; then all of it, from the table that is there and afresh.
    let few = TINY.replace("spacings_m = [70, 110]", "spacings_m = [70]");
    let (small, large) = ("gamma_showers = 64", "gamma_showers = 3_200");
    fs::write(folder.join("few.toml"), few.replace(small, "gamma_showers = 1_600")).unwrap();
    fs::write(folder.join("study.toml"), TINY.replace(small, large)).unwrap();
    let good = (Some(0), String::new());
    assert_eq!(plan(&folder, "few.toml", "few", &[]), good);
    let table = only_table(&folder);
    let before = contents(&table);
    assert_eq!(plan(&folder, "study.toml", "extended", &[]), good);
    assert_eq!(only_table(&folder), table);
    for (name, bytes) in before.iter().filter(|(name, _)| name.ends_with("parquet")) {
        assert!(fs::read(table.join(name)).unwrap() == *bytes, "{name} changed");
    }
    assert!(names(&table).len() > before.len());
    let extended = contents(&table);
    assert_eq!(plan(&folder, "study.toml", "again", &[]), good);
    assert!(contents(&table) == extended, "reading changes nothing");
    let fresh = ["plan", "study.toml", "--out", "fresh", "--quiet"];
    assert!(nightpool(&folder, &fresh).status.success());
    let results = contents(&folder.join("fresh"));
    assert!(contents(&folder.join("extended")) == results);
    assert!(contents(&folder.join("again")) == results);
    // Another air is another table.
    let other = TINY.replace("altitude_m = 2200", "altitude_m = 2210");
    fs::write(folder.join("other.toml"), other).unwrap();
    assert_eq!(plan(&folder, "other.toml", "other", &[]), good);
    assert_eq!(names(&folder.join("table")).len(), 2);
}

#[test]
fn verify_a_table_that_cannot_be_used_is_refused_with_the_reason_and_rebuilt_when_asked() {
    let folder = folder("table-refused");
    fs::write(folder.join("study.toml"), TINY).unwrap();
    assert_eq!(plan(&folder, "study.toml", "out", &[]).0, Some(0));
    let table = only_table(&folder);
    let (whole, results) = (contents(&table), contents(&folder.join("out")));
    let margins = names(&table).into_iter().find(|name| name.contains("margins")).unwrap();
    let list = fs::read_to_string(table.join("table.json")).unwrap();
    let mut flipped = fs::read(table.join(&margins)).unwrap();
    flipped[100] ^= 1;
    let damages: [(&str, &str, Vec<u8>); 4] = [
        (&margins, "corrupted", flipped.clone()),
        (&margins, "truncated", flipped[..100].to_vec()),
        ("table.json", "foreign", br#"{"format": "a table of a kitchen"}"#.to_vec()),
        ("table.json", "corrupted", list.replace("\"seed\": 3", "\"seed\": 4").into_bytes()),
    ];
    for (file, reason, bytes) in damages {
        fs::write(table.join(file), bytes).unwrap();
        let last = file.contains("json") && reason == "corrupted";
        let (code, message) = plan(&folder, "study.toml", "refused", &[]);
        assert_eq!(code, Some(2), "{message}");
        assert!(message.contains(reason) && message.contains("--rebuild"), "{message}");
        assert!(message.contains(file), "{message}");
        assert!(!folder.join("refused").exists());
        if !last {
            let (_, good) = whole.iter().find(|(name, _)| name == file).unwrap();
            fs::write(table.join(file), good).unwrap();
        }
    }
    assert_eq!(plan(&folder, "study.toml", "rebuilt", &["--rebuild"]).0, Some(0));
    assert!(contents(&table) == whole, "the same table again");
    assert!(contents(&folder.join("rebuilt")) == results);
}

/// Sends a signal to a process.
#[cfg(unix)]
fn signal(child: &std::process::Child, name: &str) {
    let sent = Command::new("kill").args([name, &child.id().to_string()]).status().unwrap();
    assert!(sent.success());
}

#[cfg(unix)]
#[test]
fn verify_an_interrupted_plan_leaves_nothing_half_written_behind() {
    let folder = folder("table-interrupted");
    let large = TINY.replace("_showers = 64", "_showers = 100_000");
    fs::write(folder.join("large.toml"), large).unwrap();
    for (name, code) in [("-INT", 130), ("-TERM", 130)] {
        let mut child = Command::new(env!("CARGO_BIN_EXE_nightpool"))
            .current_dir(&folder)
            .args(["plan", "large.toml", "--out", "out", "--quiet"])
            .stderr(Stdio::null())
            .spawn()
            .unwrap();
        std::thread::sleep(core::time::Duration::from_millis(700));
        signal(&child, name);
        assert_eq!(child.wait().unwrap().code(), Some(code), "{name}");
        assert_eq!(names(&folder), ["large.toml"], "{name}");
    }
}
