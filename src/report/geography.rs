//! Layouts as GeoJSON.

use serde_json::{Value, json};

use crate::consts::EARTH_RADIUS_M;

use super::result::PlanResult;

/// Every telescope of every layout as a point, and the site's outlines (RFC 7946, WGS84).
///
/// East and north become longitude and latitude on a sphere of the mean Earth radius, which is
/// within 0.6 % of the ellipsoid's distances: under 3 m inside 500 m. The exact positions stand in
/// the properties `east_m`, `north_m`, `up_m`. Altitudes are those of the study (above the sea),
/// not above the ellipsoid.
pub fn layouts_geojson(result: &PlanResult) -> String {
    let site = &result.site;
    let radius = EARTH_RADIUS_M + site.altitude_m;
    let place = |east: f64, north: f64| {
        let latitude = site.latitude_deg + (north / radius).to_degrees();
        let shrink = site.latitude_deg.to_radians().cos().max(1e-6);
        [site.longitude_deg + (east / radius / shrink).to_degrees(), latitude].map(rounded)
    };
    let mut features = Vec::new();
    let polygon = |role: &str, outline: &[[f64; 2]]| {
        let mut ring: Vec<[f64; 2]> = outline.iter().map(|p| place(p[0], p[1])).collect();
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
        let rank = result.ranking.iter().find(|row| row.layout == map.layout).map(|row| row.rank);
        for (index, telescope) in map.telescopes.iter().enumerate() {
            let [longitude, latitude] = place(telescope.east_m, telescope.north_m);
            let coordinates = [longitude, latitude, site.altitude_m + telescope.up_m];
            features.push(json!({
                "type": "Feature",
                "properties": {
                    "role": "telescope",
                    "layout": map.layout,
                    "rank": rank,
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
