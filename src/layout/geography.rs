//! Layouts as GeoJSON (RFC 7946): a point a telescope, in WGS84 longitude, latitude and height.

use std::collections::BTreeMap;

use geojson::{Feature, GeoJson, GeometryValue};

use super::candidate::{Candidate, Member};
use super::condition::Condition;
use super::error::LayoutError;
use super::geodetic::Geodetic;

/// Layouts of a feature collection of points, grouped by their property `layout`, in the order of
/// names. Without a height a point stands on the reference point's level. Polygons are passed over:
/// outlines of the site may stand in the same file.
///
/// # Errors
/// [`LayoutError::Geography`] naming the feature and what is wrong.
pub fn from_geojson(
    text: &str,
    kinds: &[String],
    reference: Geodetic,
) -> Result<Vec<Candidate>, LayoutError> {
    let fault = |problem: String| LayoutError::Geography(problem);
    let parsed: GeoJson = text.parse().map_err(|error| fault(format!("{error}")))?;
    let GeoJson::FeatureCollection(collection) = parsed else {
        return Err(fault("write a FeatureCollection of points".into()));
    };
    let mut layouts: BTreeMap<String, (Vec<Member>, usize)> = BTreeMap::new();
    for (index, feature) in collection.features.iter().enumerate() {
        if let Some(GeometryValue::Polygon { .. }) = feature.geometry.as_ref().map(|g| &g.value) {
            continue;
        }
        let wrong = |problem: String| fault(format!("feature {}: {problem}", index + 1));
        let (layout, member, condition) = telescope(feature, kinds, reference).map_err(wrong)?;
        let entry = layouts.entry(layout).or_insert((Vec::new(), condition));
        entry.0.push(member);
    }
    let candidates = layouts.into_iter().map(|(name, (members, least))| Candidate {
        name,
        members,
        condition: Condition::any(least),
    });
    Ok(candidates.collect())
}

fn telescope(
    feature: &Feature,
    kinds: &[String],
    reference: Geodetic,
) -> Result<(String, Member, usize), String> {
    let geometry = feature.geometry.as_ref().map(|geometry| &geometry.value);
    let Some(GeometryValue::Point { coordinates }) = geometry else {
        return Err("is not a point".into());
    };
    let place: Vec<f64> = coordinates.as_slice().to_vec();
    if place.len() < 2 || !(place[0].abs() <= 180.0 && place[1].abs() <= 90.0) {
        return Err(format!("has no longitude and latitude in degrees: {place:?}"));
    }
    let height_m = place.get(2).copied().unwrap_or(reference.height_m);
    let point = Geodetic { longitude_deg: place[0], latitude_deg: place[1], height_m };
    let text = |key: &str| feature.property(key).and_then(|value| value.as_str());
    let name = text("kind").ok_or("has no property \"kind\"")?;
    let kind = kinds.iter().position(|kind| kind == name);
    let kind = kind.ok_or(format!("kind = \"{name}\" is not one of {kinds:?}"))?;
    let layout = text("layout").unwrap_or("imported").to_owned();
    let condition = feature.property("condition").and_then(serde_json::Value::as_u64).unwrap_or(2);
    let mut position_m = reference.local_m(point);
    if place.len() < 3 {
        position_m[2] = 0.0;
    }
    Ok((layout, Member { position_m, kind }, condition as usize))
}
