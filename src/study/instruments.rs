//! Telescope kinds.

use crate::telescope::{Camera, Curve, PixelShape, TelescopeKind, Threshold, Topology};

use super::error::StudyError;
use super::file::Companions;
use super::reader::{Section, limits};

/// Reads `[[telescope]]`.
pub(super) fn kinds(
    root: &Section<'_>,
    files: &mut Companions,
) -> Result<Vec<TelescopeKind>, StudyError> {
    let mut kinds: Vec<TelescopeKind> = Vec::new();
    for section in root.sections("telescope")? {
        let kind = kind(&section, files)?;
        if kinds.iter().any(|known| known.name == kind.name) {
            return Err(section.wrong("name", "is the name of two telescope kinds; write another"));
        }
        section.finish()?;
        kinds.push(kind);
    }
    if kinds.is_empty() {
        let problem = "missing from the study; write at least one [[telescope]]";
        return Err(root.wrong("telescope", problem));
    }
    Ok(kinds)
}

fn kind(section: &Section<'_>, files: &mut Companions) -> Result<TelescopeKind, StudyError> {
    let share = limits(0.0, 1.0, "share");
    let time = limits(0.1, 200.0, "ns");
    let kind = TelescopeKind {
        name: section.text("name")?.to_owned(),
        mirror_area_m2: section.number("mirror_area_m2", limits(0.1, 5_000.0, "m2"))?,
        obscuration: section.number_or("obscuration", limits(0.0, 0.9, "share"), 0.0)?,
        reflectivity: curve(
            section,
            files,
            ["reflectivity", "reflectivity_file"],
            &["aluminium-quartz"],
        )?,
        point_spread_deg: section.number("point_spread_deg", limits(0.0, 2.0, "degrees"))?,
        point_spread_growth: section.number_or(
            "point_spread_growth",
            limits(0.0, 1.0, "degrees per degree off axis"),
            0.0,
        )?,
        mirror_delay_ns: section.number_or("mirror_delay_ns", limits(0.0, 100.0, "ns"), 0.0)?,
        camera: camera(section)?,
        light_guide_efficiency: section.number_or("light_guide_efficiency", share, 1.0)?,
        sensor: curve(
            section,
            files,
            ["sensor", "sensor_file"],
            &["bialkali", "super-bialkali", "silicon"],
        )?,
        collection_efficiency: section.number_or("collection_efficiency", share, 1.0)?,
        pulse_spread: section.number_or("pulse_spread", limits(0.0, 2.0, "relative"), 0.4)?,
        pulse_width_ns: section.number("pulse_width_ns", time)?,
        coincidence_gate_ns: section.number("coincidence_gate_ns", time)?,
        electronic_noise_pe: section.number_or(
            "electronic_noise_pe",
            limits(0.0, 100.0, "photoelectrons, RMS"),
            0.0,
        )?,
        crosstalk: section.number_or("crosstalk", limits(0.0, 0.4, "probability"), 0.0)?,
        afterpulsing: section.number_or("afterpulsing", limits(0.0, 0.5, "probability"), 0.0)?,
        afterpulse_pe: section.number_or(
            "afterpulse_pe",
            limits(0.1, 20.0, "photoelectrons"),
            1.0,
        )?,
        topology: topology(section)?,
        threshold: threshold(section)?,
        cost: section.number_or("cost", limits(0.0, 1e12, "any unit"), 0.0)?,
    };
    kind.validated().map_err(|error| {
        section
            .wrong_section(format!("{} is {}; write {}", error.field, error.value, error.allowed))
    })
}

/// A built-in curve by name, or a table in a file; the first name by default.
fn curve(
    section: &Section<'_>,
    files: &mut Companions,
    [key, file_key]: [&'static str; 2],
    names: &[&str],
) -> Result<Curve, StudyError> {
    if let Some(name) = section.text_if_any(file_key)? {
        if section.has(key) {
            return Err(section.wrong(file_key, format!("write either {key} or {file_key}")));
        }
        let (path, _) = files.read(section, file_key, name)?;
        let read = Curve::named(&path.to_string_lossy());
        return read.map_err(|error| section.wrong(file_key, error.to_string()));
    }
    let name = names[section.choice_or(key, names, 0)?];
    Curve::named(name).map_err(|error| section.wrong(key, error.to_string()))
}

fn camera(section: &Section<'_>) -> Result<Camera, StudyError> {
    let shape = match section.choice_or("pixel_shape", &["hexagonal", "square"], 0)? {
        0 => PixelShape::Hexagonal,
        _ => PixelShape::Square,
    };
    let pitch = section.number("pixel_pitch_deg", limits(0.01, 5.0, "degrees"))?;
    let field = section.number("field_of_view_deg", limits(0.1, 30.0, "degrees"))?;
    if field < pitch {
        return Err(section.wrong("field_of_view_deg", "is smaller than one pixel_pitch_deg"));
    }
    Camera::new(shape, pitch, field).ok_or_else(|| {
        let problem = "gives more than 20000 pixels in this field of view; write a larger pitch";
        section.wrong("pixel_pitch_deg", problem)
    })
}

/// One pattern by one of four keys.
fn topology(section: &Section<'_>) -> Result<Topology, StudyError> {
    const OTHERS: [&str; 3] = ["compact_pixels", "majority_pixels", "patch_clip_pe"];
    let mut given = None;
    for key in OTHERS.into_iter().filter(|key| section.has(key)) {
        if section.has("connected_pixels") || given.is_some() {
            let problem = format!("write one of connected_pixels, {}", OTHERS.join(", "));
            return Err(section.wrong(key, problem));
        }
        given = Some(match key {
            "compact_pixels" => Topology::Compact(section.count(key, 1, 4)? as usize),
            "majority_pixels" => Topology::Majority(section.count(key, 1, 32)? as usize),
            _ => Topology::PatchSum(section.number(key, limits(0.1, 1_000.0, "photoelectrons"))?),
        });
    }
    match given {
        Some(topology) => Ok(topology),
        None => Ok(Topology::Connected(section.count("connected_pixels", 1, 32)? as usize)),
    }
}

fn threshold(section: &Section<'_>) -> Result<Threshold, StudyError> {
    let fixed = section.number_if_any("threshold_pe", limits(0.1, 1e6, "photoelectrons"))?;
    let quiet = section.number_if_any("quiet_rate_hz", limits(1e-6, 1e6, "Hz"))?;
    if section.has("threshold") {
        section.choice("threshold", &["quiet"])?;
        if fixed.is_some() || quiet.is_some() {
            let problem = "write one of threshold, threshold_pe, quiet_rate_hz";
            return Err(section.wrong("threshold", problem));
        }
        return Ok(Threshold::Quiet);
    }
    match (fixed, quiet) {
        (Some(pe), None) => Ok(Threshold::FixedPe(pe)),
        (None, Some(rate)) => Ok(Threshold::QuietHz(rate)),
        (None, None) => {
            let problem = "no threshold; write threshold_pe (photoelectrons, fixed), \
                           quiet_rate_hz (Hz, the lowest threshold with fewer accidental \
                           triggers of one telescope) or threshold = \"quiet\" (the lowest quiet \
                           one of each array)";
            Err(section.wrong_section(problem))
        }
        _ => Err(section.wrong("quiet_rate_hz", "write either quiet_rate_hz or threshold_pe")),
    }
}
