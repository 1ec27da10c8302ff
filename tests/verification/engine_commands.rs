//! The commands around the two light engines.

use std::fs;

use crate::command::{TINY, contents, folder, nightpool};

fn text(bytes: &[u8]) -> String {
    String::from_utf8(bytes.to_vec()).unwrap()
}

/// A plan on the reference engine gives the same bytes for any number of threads, and says which
/// engine made it.
#[test]
fn verify_a_plan_on_the_cascade_is_the_same_for_any_number_of_threads() {
    let folder = folder("cascade-plan");
    fs::write(folder.join("study.toml"), TINY).unwrap();
    for threads in ["1", "2"] {
        let arguments =
            ["plan", "study.toml", "--engine", "cascade", "--out", threads, "--threads", threads];
        let output = nightpool(&folder, &arguments);
        assert!(output.status.success(), "{}", text(&output.stderr));
    }
    assert!(contents(&folder.join("1")) == contents(&folder.join("2")));
    assert!(fs::read_to_string(folder.join("1/run.json")).unwrap().contains("cascade"));
}

/// `agree` prints both engines and their ratio for kinds and layouts.
#[test]
fn verify_agree_prints_both_engines() {
    let folder = folder("agree");
    fs::write(folder.join("study.toml"), TINY).unwrap();
    let few = ["--gamma-showers", "64", "--background-showers", "16", "--format", "csv"];
    let output = nightpool(&folder, &[&["agree", "study.toml"][..], &few].concat());
    assert!(output.status.success(), "{}", text(&output.stderr));
    let lines = text(&output.stdout);
    let head = "quantity,of,profile,profile_error,cascade,cascade_error,ratio,ratio_error";
    assert_eq!(lines.lines().next(), Some(head));
    for wanted in ["image length (deg),broad", "gamma rate (Hz),", "proton rate (Hz),"] {
        assert!(lines.contains(wanted), "{wanted} is not in {lines}");
    }
}

/// `pool` counts photoelectrons of a study's telescope, draws what it is asked to, and refuses
/// what is not there.
#[test]
fn verify_pool_takes_a_telescope_and_draws() {
    let folder = folder("pool-draws");
    fs::write(folder.join("study.toml"), TINY).unwrap();
    let pool = |more: &[&str]| {
        let few = ["pool", "--energy", "100GeV", "--showers", "4", "--distance", "50m,100m"];
        nightpool(&folder, &[&few[..], more].concat())
    };
    let telescope = ["--telescope", "study.toml:broad", "--format", "csv"];
    let output = pool(&[&telescope[..], &["--plot", "p.svg", "--map", "m.svg"]].concat());
    assert!(output.status.success(), "{}", text(&output.stderr));
    let head = "distance_m,photoelectrons,photoelectrons_error,photoelectrons_rms";
    assert_eq!(text(&output.stdout).lines().next(), Some(head));
    for file in ["p.svg", "m.svg"] {
        assert!(fs::read_to_string(folder.join(file)).unwrap().ends_with("</svg>\n"), "{file}");
    }
    for (wrong, message) in [
        (["--telescope", "study.toml:vast"], "no kind vast; the study has broad"),
        (["--telescope", "broad"], "write STUDY.toml:KIND"),
        (["--plot", "no/such/folder.svg"], "cannot be written"),
    ] {
        let output = pool(&wrong);
        assert_eq!(output.status.code(), Some(2));
        assert!(text(&output.stderr).contains(message), "{}", text(&output.stderr));
    }
    let output = pool(&["--map", "m.svg", "--engine", "cascade"]);
    assert_eq!(output.status.code(), Some(2));
    let output = nightpool(&folder, &["calibrate", "--out", "tables", "--scale", "0"]);
    assert_eq!(output.status.code(), Some(2));
    assert!(!folder.join("tables").exists());
}
