//! The leading layout on its ground, with the light pool for scale.

use core::f64::consts::TAU;

use plotters::style::Color;

use super::axes::{Frame, Scale};
use super::canvas::{Canvas, Side, svg};
use super::map::{LEFT, draw_key, house, symbol_size};
use super::style::{INK, LABEL_FONT, PALE, TICK_FONT, look};
use crate::report::figures;
use crate::report::result::{LayoutMap, PlanResult};

const SIDE: f64 = 2000.0;

/// The leading layout, boundary, exclusions, control house, and the reach of a threshold shower's
/// light around the middle of the telescopes.
pub fn site_map_chart(result: &PlanResult) -> String {
    let leader = result.ranking.first().map(|row| row.layout.as_str()).unwrap_or_default();
    let map = result.maps.iter().find(|map| map.layout == leader);
    let middle = map.map_or([0.0; 2], middle);
    let pools = pools(result, middle);
    let (x, y) = extent(result, map, &pools);
    let frame = Frame { left: LEFT, right: LEFT + SIDE, top: 120.0, bottom: 120.0 + SIDE, x, y };
    svg((120.0 + SIDE + 380.0) as u32, "The leading layout on its ground", |canvas| {
        canvas.text(leader, (LEFT, 60.0), LABEL_FONT, Side::Left);
        frame.draw_below(canvas, "East (m)");
        frame.draw_left(canvas, "North (m)");
        ground(canvas, &frame, result);
        for (line, dash) in pools.iter().zip([&[][..], &[40.0, 22.0]]) {
            let line: Vec<_> = line.iter().filter_map(|p| frame.at(p[0], p[1])).collect();
            canvas.dashed(&line, dash, look(4).colour, 7);
        }
        let kinds: Vec<&str> = result.kinds.iter().map(|kind| kind.kind.as_str()).collect();
        let used =
            |kind: &&&str| map.is_some_and(|map| map.telescopes.iter().any(|t| t.kind == **kind));
        let kinds: Vec<&str> = kinds.iter().filter(used).copied().collect();
        for telescope in map.iter().flat_map(|map| &map.telescopes) {
            let kind = kinds.iter().position(|kind| *kind == telescope.kind).unwrap_or(0);
            if let Some(at) = frame.at(telescope.east_m, telescope.north_m) {
                canvas.marker(at, 1.2 * symbol_size(telescope.mirror_area_m2), look(kind));
            }
        }
        frame.draw_outline(canvas);
        let below = frame.bottom + 220.0;
        draw_key(canvas, result, &kinds, below);
        pool_key(canvas, result, below + 90.0);
    })
}

fn middle(map: &LayoutMap) -> [f64; 2] {
    let count = map.telescopes.len().max(1) as f64;
    let sum = |pick: fn(&crate::report::result::PlacedTelescope) -> f64| {
        map.telescopes.iter().map(pick).sum::<f64>() / count
    };
    [sum(|t| t.east_m), sum(|t| t.north_m)]
}

/// Circles across the axis, carried down to level ground: stretched along the pointing's azimuth
/// by 1 / cos(zenith angle).
fn pools(result: &PlanResult, middle: [f64; 2]) -> Vec<Vec<[f64; 2]>> {
    let Some(reach) = result.reach else { return Vec::new() };
    let stretch = 1.0 / result.site.zenith_deg.to_radians().cos();
    let (sin, cos) = result.site.azimuth_deg.to_radians().sin_cos();
    let ring = |radius: f64| -> Vec<[f64; 2]> {
        let point = |step: u32| {
            let (across, along) = (TAU * f64::from(step) / 180.0).sin_cos();
            let (across, along) = (radius * across, radius * along * stretch);
            [middle[0] + along * sin + across * cos, middle[1] + along * cos - across * sin]
        };
        (0..=180).map(point).collect()
    };
    let radii = [reach.half_m, reach.tenth_m].into_iter().filter(|radius| radius.is_finite());
    radii.map(ring).collect()
}

fn extent(result: &PlanResult, map: Option<&LayoutMap>, pools: &[Vec<[f64; 2]>]) -> (Scale, Scale) {
    let stands = map.into_iter().flat_map(|map| &map.telescopes).map(|t| [t.east_m, t.north_m]);
    let points: Vec<[f64; 2]> = stands
        .chain(result.site.boundary_enu_m.iter().copied())
        .chain(pools.iter().flatten().copied())
        .collect();
    let range = |axis: usize| {
        points
            .iter()
            .map(|point| point[axis])
            .fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), v| (l.min(v), h.max(v)))
    };
    let ((west, east), (south, north)) = (range(0), range(1));
    let half = (0.54 * (east - west).max(north - south)).clamp(50.0, 1e6);
    let (x, y) = (0.5 * (west + east), 0.5 * (south + north));
    if !(x.is_finite() && y.is_finite()) {
        return (Scale::between(-50.0, 50.0), Scale::between(-50.0, 50.0));
    }
    (Scale::between(x - half, x + half), Scale::between(y - half, y + half))
}

fn ground(canvas: &Canvas<'_>, frame: &Frame, result: &PlanResult) {
    let outline = |points: &[[f64; 2]]| -> Vec<(f64, f64)> {
        points.iter().chain(points.first()).filter_map(|p| frame.at(p[0], p[1])).collect()
    };
    for excluded in &result.site.exclusions_enu_m {
        canvas.fill(&outline(excluded), PALE.mix(0.8).filled());
    }
    if !result.site.boundary_enu_m.is_empty() {
        canvas.dashed(&outline(&result.site.boundary_enu_m), &[30.0, 16.0], INK, 5);
    }
    if let Some(at) = result.site.control_house_enu_m.and_then(|[e, n]| frame.at(e, n)) {
        house(canvas, at);
    }
}

fn pool_key(canvas: &Canvas<'_>, result: &PlanResult, y: f64) {
    let Some(reach) = result.reach else { return };
    let energy = figures::short(reach.energy_gev);
    let names = [
        (LEFT, &[][..], format!("half the light of {energy} GeV")),
        (LEFT + 1_150.0, &[40.0, 22.0][..], "a tenth".to_owned()),
    ];
    for (x, dash, name) in names {
        canvas.dashed(&[(x, y), (x + 150.0, y)], dash, look(4).colour, 7);
        canvas.text(&name, (x + 180.0, y), TICK_FONT, Side::Left);
    }
}
