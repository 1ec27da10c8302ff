//! From a path to a study: bytes, checksum, sections.

use std::fs;
use std::io::Read;
use std::path::{Path, PathBuf};

use sha2::{Digest, Sha256};
use toml::de::DeTable;

use crate::atmosphere::Atmosphere;
use crate::layout::Tariff;
use crate::response::CORES_PER_SHOWER;

use super::error::StudyError;
use super::reader::{Document, Section, limits};
use super::resolved::{Budget, Engine, Ranking, Robustness, Study};
use super::{candidates, costs, ground, instruments, sky};

/// Largest study file, and largest file that a study names, bytes.
pub const MOST_BYTES: u64 = 8 << 20;
/// Most showers of one primary, and most array events of one primary.
const MOST_SHOWERS: u64 = 100_000_000;
const MOST_EVENTS: u64 = 500_000_000;

/// The files that a study names, by the order in which it names them.
pub(super) struct Companions {
    folder: PathBuf,
    hash: Sha256,
}

impl Companions {
    /// Reads a file that the study names, relative to the study's folder, and adds it to the
    /// checksum.
    pub fn read(
        &mut self,
        section: &Section<'_>,
        key: &'static str,
        name: &str,
    ) -> Result<(PathBuf, String), StudyError> {
        let path = self.folder.join(name);
        let text = contents(&path).map_err(|error| {
            section.wrong(key, format!("{}: {}", path.display(), error.problem))
        })?;
        self.hash.update(text.as_bytes());
        Ok((path, text))
    }
}

/// The text of a file, with a plain reason if there is none.
fn contents(path: &Path) -> Result<String, StudyError> {
    let fault = |problem: String| StudyError::of_file(path, problem);
    if path.is_dir() {
        return Err(fault("is a folder; name a file".into()));
    }
    let unreadable = |error: std::io::Error| fault(format!("cannot be read: {error}"));
    let mut bytes = Vec::new();
    let file = fs::File::open(path).map_err(unreadable)?;
    file.take(MOST_BYTES + 1).read_to_end(&mut bytes).map_err(unreadable)?;
    if bytes.len() as u64 > MOST_BYTES {
        return Err(fault(format!("is larger than {} MiB, the most allowed", MOST_BYTES >> 20)));
    }
    String::from_utf8(bytes).map_err(|error| {
        let at = error.utf8_error().valid_up_to();
        let line = error.as_bytes()[..at].iter().filter(|byte| **byte == b'\n').count() + 1;
        let problem = format!("line {line} is not UTF-8; save the file as UTF-8 text");
        let mut error = fault(problem);
        error.line = Some(line);
        error
    })
}

impl Study {
    /// Reads, resolves and validates a study.
    ///
    /// # Errors
    /// [`StudyError`] with the place of the first fault.
    pub fn read(path: &Path) -> Result<Self, StudyError> {
        let text = contents(path)?;
        Self::parse(path, &text)
    }

    /// Resolves and validates the text of a study; `path` is for messages and for the files that
    /// the study names.
    ///
    /// # Errors
    /// [`StudyError`] with the place of the first fault.
    pub fn parse(path: &Path, text: &str) -> Result<Self, StudyError> {
        let text = text.strip_prefix('\u{feff}').unwrap_or(text);
        let table = DeTable::parse(text).map_err(|error| {
            let span = error.span().unwrap_or(0..0);
            let problem = format!("is not valid TOML: {}", error.message().replace('\n', "; "));
            StudyError::at(path, text, &span, "", false).because(problem)
        })?;
        let root = Section::root(Document { file: path, text }, &table);
        let folder = path.parent().map(Path::to_owned).unwrap_or_default();
        let mut companions = Companions { folder, hash: Sha256::new_with_prefix(text.as_bytes()) };
        resolved(path, root, &mut companions)
    }
}

fn resolved(
    path: &Path,
    root: Section<'_>,
    companions: &mut Companions,
) -> Result<Study, StudyError> {
    let name = name(path, &root)?;
    let title = root.text_if_any("title")?.unwrap_or(&name).to_owned();
    let seed = root.count_or("seed", 0, i64::MAX as u64, 1)?;
    let engine = match root.choice_or("engine", &["profile", "cascade"], 0)? {
        0 => Engine::Profile,
        _ => Engine::Cascade,
    };
    let site = ground::site(root.section("site")?, companions)?;
    let air = sky::air(root.section("air")?, companions)?;
    let (night_sky, moonlight) = sky::night_sky(root.section("night_sky")?)?;
    let trigger = sky::trigger(root.section_if_any("trigger")?)?;
    let mut kinds = instruments::kinds(&root, companions)?;
    candidates::add_scanned_kinds(&root, &mut kinds)?;
    let pointing = sky::pointing(root.section("pointing")?, &kinds)?;
    let built = candidates::built(&root, &kinds, &site)?;
    let tariff = costs::tariff(root.section_if_any("costs")?, &kinds, &site, &built)?;
    let recording = costs::recording(root.section_if_any("recording")?)?;
    let layouts = candidates::layouts(&root, (&kinds, &site, &built), companions)?;
    let alike = pointing.zenith_deg == 0.0 && site.field_ut.is_none();
    let (layouts, left_out) = candidates::distinct(layouts, alike);
    let sources = sky::sources(&root)?;
    let backgrounds = sky::backgrounds(&root)?;
    let budget = budget(root.section("budget")?)?;
    let dead_time_us = dead_time_us(root.section_if_any("readout")?)?;
    let ranking = ranking(root.section_if_any("ranking")?, &tariff)?;
    let robustness = root.section_if_any("robustness")?.map(robustness).transpose()?;
    root.finish()?;
    let checksum = companions.hash.clone().finalize();
    Ok(Study {
        name,
        title,
        path: path.to_owned(),
        checksum: checksum.iter().map(|byte| format!("{byte:02x}")).collect(),
        seed,
        engine,
        site,
        air,
        night_sky,
        moonlight,
        trigger,
        kinds,
        built,
        tariff,
        recording,
        layouts,
        left_out,
        pointing,
        sources,
        backgrounds,
        dead_time_us,
        budget,
        ranking,
        robustness,
    })
}

/// The study's name: given, or the file's; it becomes a folder's name.
fn name(path: &Path, root: &Section<'_>) -> Result<String, StudyError> {
    let given = root.text_if_any("name")?;
    let stem = path.file_stem().map(|stem| stem.to_string_lossy().into_owned());
    let name = given.map(str::to_owned).or(stem).unwrap_or_default();
    let fits = |c: char| c.is_ascii_alphanumeric() || "-_.".contains(c);
    if given.is_some() && (!name.chars().all(fits) || name.starts_with('.') || name.len() > 80) {
        let problem = "names the report's folder; write up to 80 letters, digits, `-`, `_`, `.`";
        return Err(root.wrong("name", problem));
    }
    Ok(name)
}

fn dead_time_us(section: Option<Section<'_>>) -> Result<f64, StudyError> {
    let Some(section) = section else { return Ok(0.0) };
    let time = section.number("dead_time_us", limits(0.0, 1e6, "us"))?;
    section.finish()?;
    Ok(time)
}

fn budget(section: Section<'_>) -> Result<Budget, StudyError> {
    let gamma_showers = section.count("gamma_showers", 16, MOST_SHOWERS)?;
    let background_showers = section.count("background_showers", 16, MOST_SHOWERS)?;
    for (key, showers) in
        [("gamma_showers", gamma_showers), ("background_showers", background_showers)]
    {
        let events = showers.saturating_mul(CORES_PER_SHOWER as u64);
        if events > MOST_EVENTS {
            let problem = format!(
                "at {CORES_PER_SHOWER} core positions each gives {events} array events; \
                 at most {MOST_EVENTS} are allowed"
            );
            return Err(section.wrong(key, problem));
        }
    }
    let gamma_energy_gev = energies(&section, "gamma_energy_gev", [10.0, 30_000.0])?;
    let background_energy_gev = energies(&section, "background_energy_gev", [20.0, 100_000.0])?;
    let background_rate_error =
        section.number_or("background_rate_error", limits(0.001, 1.0, "relative"), 0.05)?;
    let impact_radius_m = section.number_if_any("impact_radius_m", limits(50.0, 5_000.0, "m"))?;
    section.finish()?;
    Ok(Budget {
        gamma_showers,
        background_showers,
        gamma_energy_gev,
        background_energy_gev,
        background_rate_error,
        impact_radius_m,
    })
}

fn energies(
    section: &Section<'_>,
    key: &'static str,
    otherwise: [f64; 2],
) -> Result<[f64; 2], StudyError> {
    let range = section.tuple_if_any::<2>(key, limits(5.0, 100_000.0, "GeV"))?;
    let range = range.unwrap_or(otherwise);
    if range[1] < 2.0 * range[0] {
        let problem = "write [lowest, highest] in GeV, the highest at least twice the lowest";
        return Err(section.wrong(key, problem));
    }
    Ok(range)
}

fn ranking(section: Option<Section<'_>>, tariff: &Tariff) -> Result<Ranking, StudyError> {
    const SCORES: [&str; 3] =
        ["gamma_rate_hz", "gamma_rate_per_cost", "gamma_rate_per_root_background"];
    let Some(section) = section else {
        return Ok(Ranking { score: SCORES[0].into(), resamples: 400, up_probability: 0.95 });
    };
    let score = SCORES[section.choice_or("score", &SCORES, 0)?].to_owned();
    let free = tariff.kinds.iter().any(|price| !(price.telescope + price.pad > 0.0));
    if free && score == SCORES[1] {
        let problem = "needs a cost above 0 for every telescope; one has none";
        return Err(section.wrong("score", problem));
    }
    let resamples = section.count_or("resamples", 20, 100_000, 400)? as usize;
    let up_probability =
        section.number_or("up_probability", limits(0.0, 1.0, "probability"), 0.95)?;
    section.finish()?;
    Ok(Ranking { score, resamples, up_probability })
}

fn robustness(section: Section<'_>) -> Result<Robustness, StudyError> {
    let name = section.text_if_any("profile")?.unwrap_or("tropical");
    let atmosphere = Atmosphere::named(name);
    let atmosphere = atmosphere.map_err(|error| section.wrong("profile", error.to_string()))?;
    let sky_factor = section.number_or("sky_factor", limits(0.1, 100.0, ""), 2.0)?;
    let showers_share = section.number_or("showers_share", limits(0.01, 1.0, "share"), 0.25)?;
    section.finish()?;
    Ok(Robustness { atmosphere, sky_factor, showers_share })
}
