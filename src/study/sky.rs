//! Air, night sky, pointing, spectra.

use crate::atmosphere::Atmosphere;
use crate::rates;
use crate::scan::QuietRule;
use crate::shower::Species;
use crate::telescope::{Brightness, NightSky, TelescopeKind};

use super::error::StudyError;
use super::file::Companions;
use super::reader::{Section, limits};
use super::resolved::{Air, ArrayTrigger, Background, Moonlight, Pointing, Source, Spectrum};

/// Reads `[air]`.
pub(super) fn air(section: Section<'_>, files: &mut Companions) -> Result<Air, StudyError> {
    let atmosphere = atmosphere(&section, files)?;
    let air = Air {
        atmosphere,
        aerosol_depth_550nm: section.number_or(
            "aerosol_depth_550nm",
            limits(0.0, 3.0, ""),
            0.05,
        )?,
        angstrom_exponent: section.number_or("angstrom_exponent", limits(-1.0, 4.0, ""), 1.3)?,
        aerosol_scale_height_m: section.number_or(
            "aerosol_scale_height_m",
            limits(100.0, 10_000.0, "m"),
            1_200.0,
        )?,
        molecular: section.flag_or("molecular", true)?,
        aerosol: section.flag_or("aerosol", true)?,
        ozone: section.flag_or("ozone", true)?,
    };
    section.finish()?;
    Ok(air)
}

fn atmosphere(section: &Section<'_>, files: &mut Companions) -> Result<Atmosphere, StudyError> {
    if let Some(name) = section.text_if_any("profile_file")? {
        if section.has("profile") {
            return Err(section.wrong("profile_file", "write either profile or profile_file"));
        }
        let (path, text) = files.read(section, "profile_file", name)?;
        let read = Atmosphere::from_text(&path.display().to_string(), &text);
        return read.map_err(|error| section.wrong("profile_file", error.to_string()));
    }
    let name = section.text_if_any("profile")?.unwrap_or("us1976");
    Atmosphere::named(name).map_err(|error| section.wrong("profile", error.to_string()))
}

/// Reads `[night_sky]`.
pub(super) fn night_sky(section: Section<'_>) -> Result<(NightSky, Moonlight), StudyError> {
    let magnitude = section
        .number_if_any("brightness_v_mag_arcsec2", limits(15.0, 23.5, "V magnitudes/arcsec2"))?;
    let photons =
        section.number_if_any("photons_m2_s_sr", limits(1e10, 1e16, "photons/(m2 s sr)"))?;
    let brightness = match (magnitude, photons) {
        (Some(magnitude), None) => Brightness::VMagArcsec2(magnitude),
        (None, Some(photons)) => Brightness::PhotonsM2SSr(photons),
        (None, None) => Brightness::VMagArcsec2(21.9),
        _ => {
            let problem = "write either photons_m2_s_sr or brightness_v_mag_arcsec2";
            return Err(section.wrong("photons_m2_s_sr", problem));
        }
    };
    let field = section.number_or("field_factor", limits(0.1, 100.0, ""), 1.0)?;
    let moonlight = section.number_or("moonlight_factor", limits(1.0, 1e4, ""), 1.0)?;
    let factors = limits(1.0, 1e4, "times the stated sky");
    let levels = section.numbers_if_any("moonlight_levels", factors)?.unwrap_or_default();
    if levels.windows(2).any(|pair| pair[0] >= pair[1]) || levels.len() > 8 {
        return Err(section.wrong("moonlight_levels", "write at most 8 rising factors"));
    }
    let share = limits(0.01, 1.0, "share of the showers");
    let showers_share = section.number_or("moonlight_showers_share", share, 0.25)?;
    section.finish()?;
    let sky = NightSky::new(brightness, field * moonlight);
    Ok((sky, Moonlight { levels, showers_share }))
}

/// Accidentals of an array over its shower triggers, unless a study says otherwise. Common
/// practice, no source.
const ACCIDENTAL_SHARE: f64 = 0.01;
/// Triggers that a telescope's read-out takes, Hz, unless a study says otherwise. Common practice,
/// no source.
const READOUT_LIMIT_HZ: f64 = 10_000.0;

/// Reads `[trigger]`.
pub(super) fn trigger(section: Option<Section<'_>>) -> Result<ArrayTrigger, StudyError> {
    let (accidental_share, readout_limit_hz) = (ACCIDENTAL_SHARE, READOUT_LIMIT_HZ);
    let Some(section) = section else {
        let quiet = QuietRule { accidental_share, readout_limit_hz };
        return Ok(ArrayTrigger { delays_compensated: true, quiet });
    };
    let share = limits(1e-9, 1.0, "share of the array's shower triggers");
    let limit = limits(1e-3, 1e9, "Hz a telescope");
    let trigger = ArrayTrigger {
        delays_compensated: section.choice_or("delays", &["compensated", "none"], 0)? == 0,
        quiet: QuietRule {
            accidental_share: section.number_or(
                "quiet_accidental_share",
                share,
                accidental_share,
            )?,
            readout_limit_hz: section.number_or("readout_limit_hz", limit, readout_limit_hz)?,
        },
    };
    section.finish()?;
    Ok(trigger)
}

/// Reads `[pointing]`. The default cone reaches 3 degrees past the widest camera's edge.
pub(super) fn pointing(
    section: Section<'_>,
    kinds: &[TelescopeKind],
) -> Result<Pointing, StudyError> {
    let zenith_deg = section.number_or("zenith_deg", limits(0.0, 70.0, "degrees"), 0.0)?;
    let azimuth_deg = section.number_or("azimuth_deg", limits(0.0, 360.0, "degrees"), 180.0)?;
    let widest = kinds.iter().map(|kind| 0.5 * kind.camera.field_of_view_deg).fold(0.0, f64::max);
    let cone = limits(0.1, 30.0, "degrees");
    let cone_half_angle_deg = section.number_or("cone_half_angle_deg", cone, widest + 3.0)?;
    let offset = limits(0.0, 15.0, "degrees");
    let source_offset_deg = section.number_or("source_offset_deg", offset, 0.0)?;
    let bearing = limits(-360.0, 360.0, "degrees");
    let source_bearing_deg = section.number_or("source_bearing_deg", bearing, 0.0)?;
    section.finish()?;
    Ok(Pointing {
        zenith_deg,
        azimuth_deg,
        source_offset_deg,
        source_bearing_deg,
        cone_half_angle_deg,
    })
}

/// Reads `[[source]]`.
pub(super) fn sources(root: &Section<'_>) -> Result<Vec<Source>, StudyError> {
    let mut sources: Vec<Source> = Vec::new();
    for section in root.sections("source")? {
        let name = section.text("name")?.to_owned();
        if sources.iter().any(|source| source.name == name) {
            return Err(section.wrong("name", "is the name of two sources; write another"));
        }
        let spectrum = spectrum(&section)?
            .ok_or_else(|| section.wrong_section("write spectrum = \"...\", or flux_m2_s_tev"))?;
        section.finish()?;
        sources.push(Source { name, spectrum });
    }
    if sources.is_empty() {
        return Err(root.wrong("source", "missing from the study; write at least one [[source]]"));
    }
    Ok(sources)
}

/// Reads `[[background]]`; protons if there is none.
pub(super) fn backgrounds(root: &Section<'_>) -> Result<Vec<Background>, StudyError> {
    let mut backgrounds: Vec<Background> = Vec::new();
    for section in root.sections("background")? {
        let species: Species = section
            .text("primary")?
            .parse()
            .map_err(|problem| section.wrong("primary", problem))?;
        if species == Species::Gamma || backgrounds.iter().any(|known| known.species == species) {
            return Err(section.wrong("primary", "write each background once, and no gammas"));
        }
        let spectrum = match spectrum(&section)? {
            Some(spectrum) => spectrum,
            None => published(species).map_err(|problem| section.wrong("primary", problem))?,
        };
        section.finish()?;
        backgrounds.push(Background { species, spectrum });
    }
    if backgrounds.is_empty() {
        let species = Species::Proton;
        let spectrum = Spectrum::Named(species.to_string());
        backgrounds.push(Background { species, spectrum });
    }
    Ok(backgrounds)
}

/// The built-in spectrum of a species.
fn published(species: Species) -> Result<Spectrum, String> {
    let name = species.to_string();
    match rates::Spectrum::named(&name) {
        Ok(_) => Ok(Spectrum::Named(name)),
        Err(_) => Err("has no built-in spectrum; write flux_m2_s_tev, pivot_tev, index".into()),
    }
}

fn spectrum(section: &Section<'_>) -> Result<Option<Spectrum>, StudyError> {
    if let Some(name) = section.text_if_any("spectrum")? {
        if section.has("flux_m2_s_tev") {
            return Err(section.wrong("spectrum", "write either spectrum or flux_m2_s_tev"));
        }
        let known = rates::Spectrum::named(name);
        known.map_err(|error| section.wrong("spectrum", error.to_string()))?;
        return Ok(Some(Spectrum::Named(name.to_owned())));
    }
    let flux = limits(1e-20, 1e6, "1/(m2 s TeV), per sr if diffuse");
    let Some(flux_m2_s_tev) = section.number_if_any("flux_m2_s_tev", flux)? else {
        return Ok(None);
    };
    Ok(Some(Spectrum::PowerLaw {
        flux_m2_s_tev,
        pivot_tev: section.number_or("pivot_tev", limits(0.001, 100.0, "TeV"), 1.0)?,
        index: section.number("index", limits(0.5, 6.0, "positive for a falling spectrum"))?,
        cutoff_tev: section.number_if_any("cutoff_tev", limits(0.005, 1e4, "TeV"))?,
    }))
}
