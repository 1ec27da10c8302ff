//! Layouts as GeoJSON.

use serde_json::{Value, json};

use crate::layout::geodetic::Geodetic;

use super::result::PlanResult;

/// Every telescope of every layout as a point, and the site's outlines (RFC 7946, WGS84).
///
/// A study reads it back as `layouts_file`. The positions stand in the properties `east_m`,
/// `north_m`, `up_m`, too. Heights are those of the study, above the sea and not above the
/// ellipsoid.
pub fn layouts_geojson(result: &PlanResult) -> String {
    let site = &result.site;
    let reference = Geodetic {
        latitude_deg: site.latitude_deg,
        longitude_deg: site.longitude_deg,
        height_m: site.altitude_m,
    };
    let place = |local_m: [f64; 3]| {
        let point = reference.at_local_m(local_m);
        let [longitude, latitude] = [point.longitude_deg, point.latitude_deg].map(rounded);
        [longitude, latitude, (point.height_m * 1e3).round() * 1e-3]
    };
    let mut features = Vec::new();
    let polygon = |role: &str, outline: &[[f64; 2]]| {
        let mut ring: Vec<[f64; 2]> = outline
            .iter()
            .map(|p| place([p[0], p[1], 0.0]))
            .map(|[longitude, latitude, _]| [longitude, latitude])
            .collect();
        if doubled_area(&ring) < 0.0 {
            ring.reverse();
        }
        ring.extend(ring.first().copied());
        json!({
            "type": "Feature",
            "properties": { "role": role, "site": site.name },
            "geometry": { "type": "Polygon", "coordinates": [ring] },
        })
    };
    if !site.boundary_enu_m.is_empty() {
        features.push(polygon("boundary", &site.boundary_enu_m));
    }
    features.extend(site.exclusions_enu_m.iter().map(|ground| polygon("exclusion", ground)));
    for map in &result.maps {
        let row = result.ranking.iter().find(|row| row.layout == map.layout);
        let (rank, condition) = (row.map(|row| row.rank), row.map(|row| row.condition));
        for (index, telescope) in map.telescopes.iter().enumerate() {
            let coordinates = place([telescope.east_m, telescope.north_m, telescope.up_m]);
            features.push(json!({
                "type": "Feature",
                "properties": {
                    "role": "telescope",
                    "layout": map.layout,
                    "rank": rank,
                    "condition": condition,
                    "telescope": index + 1,
                    "kind": telescope.kind,
                    "mirror_area_m2": telescope.mirror_area_m2,
                    "east_m": telescope.east_m,
                    "north_m": telescope.north_m,
                    "up_m": telescope.up_m,
                },
                "geometry": { "type": "Point", "coordinates": coordinates },
            }));
        }
    }
    let collection: Value = json!({ "type": "FeatureCollection", "features": features });
    format!("{collection}\n")
}

/// Eight decimals of a degree: a millimetre.
fn rounded(degrees: f64) -> f64 {
    (degrees * 1e8).round() / 1e8
}

/// Twice the signed area of a ring, positive if it turns to the left.
fn doubled_area(ring: &[[f64; 2]]) -> f64 {
    let edges = ring.iter().zip(ring.iter().cycle().skip(1));
    edges.map(|(a, b)| a[0] * b[1] - b[0] * a[1]).sum()
}
