//! The site: place, field, boundary, exclusions.

use geojson::{GeoJson, GeometryValue};

use crate::layout::geodetic::Geodetic;

use super::error::StudyError;
use super::file::Companions;
use super::reader::{Section, limits};
use super::resolved::{Exclusion, Site};

const FARTHEST_M: f64 = 20_000.0;

/// Reads `[site]`.
pub(super) fn site(section: Section<'_>, files: &mut Companions) -> Result<Site, StudyError> {
    let name = section.text("name")?.to_owned();
    let latitude_deg = section.number("latitude_deg", limits(-90.0, 90.0, "degrees north"))?;
    let longitude_deg = section.number("longitude_deg", limits(-180.0, 180.0, "degrees east"))?;
    let altitude_m = section.number("altitude_m", limits(-400.0, 6_000.0, "m"))?;
    let field = limits(-80.0, 80.0, "microtesla");
    let east = section.number_if_any("field_east_ut", field)?;
    let north = section.number_if_any("field_north_ut", field)?;
    let up = section.number_if_any("field_up_ut", field)?;
    let field_ut = match (east, north, up) {
        (Some(east), Some(north), Some(up)) => Some([east, north, up]),
        (None, None, None) => None,
        _ => {
            let problem = "write all three of field_east_ut, field_north_ut, field_up_ut, or none";
            return Err(section.wrong_section(problem));
        }
    };
    let mut site = Site {
        name,
        latitude_deg,
        longitude_deg,
        altitude_m,
        field_ut,
        boundary_enu_m: polygon(&section, "boundary_enu_m")?.unwrap_or_default(),
        exclusions: Vec::new(),
        control_house_enu_m: section
            .tuple_if_any::<2>("control_house_enu_m", limits(-FARTHEST_M, FARTHEST_M, "m"))?,
    };
    for exclusion in section.sections("exclusion")? {
        let name = exclusion.text("name")?.to_owned();
        let missing = || exclusion.wrong_section("missing: write outline_enu_m, a list of points");
        let outline_enu_m = polygon(&exclusion, "outline_enu_m")?.ok_or_else(missing)?;
        exclusion.finish()?;
        site.exclusions.push(Exclusion { name, outline_enu_m });
    }
    if let Some(file) = section.text_if_any("outlines_file")? {
        outlines(&section, file, files, &mut site)?;
    }
    section.finish()?;
    Ok(site)
}

fn polygon(section: &Section<'_>, key: &'static str) -> Result<Option<Vec<[f64; 2]>>, StudyError> {
    let range = limits(-FARTHEST_M, FARTHEST_M, "m");
    let Some(points) = section.points_if_any(key, range)? else { return Ok(None) };
    let mut outline: Vec<[f64; 2]> = points.iter().map(|point| [point[0], point[1]]).collect();
    if outline.first() == outline.last() && outline.len() > 1 {
        outline.pop();
    }
    if outline.len() < 3 {
        return Err(section.wrong(key, "is no polygon; write at least three points"));
    }
    Ok(Some(outline))
}

/// Reads polygons of a GeoJSON file (WGS84 longitude and latitude): the one with the property
/// `"role": "boundary"` is the boundary, those with `"role": "exclusion"` are excluded ground.
fn outlines(
    section: &Section<'_>,
    name: &str,
    files: &mut Companions,
    site: &mut Site,
) -> Result<(), StudyError> {
    const KEY: &str = "outlines_file";
    let (path, text) = files.read(section, KEY, name)?;
    let fault = |problem: &str| section.wrong(KEY, format!("{}: {problem}", path.display()));
    let parsed: GeoJson = text.parse().map_err(|error| fault(&format!("{error}")))?;
    let GeoJson::FeatureCollection(collection) = parsed else {
        return Err(fault("write a FeatureCollection of polygons"));
    };
    for feature in collection.features {
        let text = |key: &str| feature.property(key).and_then(|value| value.as_str());
        let (role, label) = (text("role").unwrap_or_default(), text("name").unwrap_or("excluded"));
        let Some(GeometryValue::Polygon { coordinates: rings }) =
            feature.geometry.as_ref().map(|geometry| &geometry.value)
        else {
            return Err(fault("holds a feature that is not a polygon"));
        };
        let ring = rings.first().map(|ring| &ring[..]).unwrap_or_default();
        let mut outline: Vec<_> =
            ring.iter().map(|position| local_m(site, position[0], position[1])).collect();
        outline.pop();
        if outline.len() < 3 || outline.iter().flatten().any(|v| !(v.abs() <= FARTHEST_M)) {
            return Err(fault("holds a polygon of under three corners or over 20 km away"));
        }
        match role {
            "boundary" => site.boundary_enu_m = outline,
            "exclusion" => {
                site.exclusions.push(Exclusion { name: label.to_owned(), outline_enu_m: outline });
            }
            _ => return Err(fault("each polygon needs \"role\": \"boundary\" or \"exclusion\"")),
        }
    }
    Ok(())
}

/// East and north of the site's reference point, on the ellipsoid.
fn local_m(site: &Site, longitude_deg: f64, latitude_deg: f64) -> [f64; 2] {
    let reference = site.reference();
    let [east, north, _] = reference.local_m(Geodetic { latitude_deg, longitude_deg, ..reference });
    [east, north]
}
