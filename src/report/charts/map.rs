//! Where the telescopes of the leading layouts stand.

use plotters::style::Color;

use super::axes::{Frame, Scale};
use super::canvas::{Canvas, Side, WIDTH, svg};
use super::curves::shortened;
use super::style::{INK, LABEL_FONT, PALE, TICK_FONT, look};
use crate::report::result::{LayoutMap, PlanResult};

const COLUMNS: usize = 3;
const MOST: usize = 9;
pub(super) const LEFT: f64 = 290.0;
const SIDE: f64 = 724.0;
const GAP: f64 = 60.0;
const HEADING: f64 = 84.0;

/// Small maps of the leading layouts at one scale, with boundary, exclusions and control house.
/// A telescope's symbol grows with its mirror's diameter and is far larger than the telescope.
pub fn layout_map_chart(result: &PlanResult) -> String {
    let order = result.ranking.iter().take(MOST);
    let maps: Vec<(usize, &LayoutMap)> = order
        .filter_map(|row| {
            let map = result.maps.iter().find(|map| map.layout == row.layout);
            map.map(|map| (row.rank, map))
        })
        .collect();
    let (x, y) = extent(result, &maps);
    let mut kinds: Vec<&str> = result.kinds.iter().map(|kind| kind.kind.as_str()).collect();
    kinds.dedup();
    let rows = maps.len().div_ceil(COLUMNS).max(1);
    let height = 60.0 + rows as f64 * (SIDE + GAP + HEADING) + 220.0;
    svg(height as u32, "Maps of the leading layouts", |canvas| {
        for (index, (rank, map)) in maps.iter().enumerate() {
            let (column, row) = (index % COLUMNS, index / COLUMNS);
            let left = LEFT + column as f64 * (SIDE + GAP);
            let top = 30.0 + HEADING + row as f64 * (SIDE + GAP + HEADING);
            let frame = Frame { left, right: left + SIDE, top, bottom: top + SIDE, x, y };
            let last = index + COLUMNS >= maps.len();
            draw_map(canvas, &frame, result, map, &kinds, (column == 0, last));
            let title = shortened(&format!("{rank}  {}", map.layout), 29);
            canvas.text(&title, (left, top - 42.0), TICK_FONT, Side::Left);
        }
        draw_key(canvas, result, &kinds, height - 50.0);
    })
}

fn extent(result: &PlanResult, maps: &[(usize, &LayoutMap)]) -> (Scale, Scale) {
    let stands = maps.iter().flat_map(|(_, map)| &map.telescopes);
    let stands = stands.map(|telescope| [telescope.east_m, telescope.north_m]);
    let points: Vec<[f64; 2]> = stands.chain(result.site.boundary_enu_m.iter().copied()).collect();
    let range = |axis: usize| {
        points
            .iter()
            .map(|point| point[axis])
            .fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), v| (l.min(v), h.max(v)))
    };
    let ((west, east), (south, north)) = (range(0), range(1));
    let half = (0.54 * (east - west).max(north - south)).clamp(50.0, 1e6);
    let (x, y) = (0.5 * (west + east), 0.5 * (south + north));
    (Scale::between(x - half, x + half), Scale::between(y - half, y + half))
}

fn draw_map(
    canvas: &Canvas<'_>,
    frame: &Frame,
    result: &PlanResult,
    map: &LayoutMap,
    kinds: &[&str],
    (leftmost, lowest): (bool, bool),
) {
    let names = |show: bool, name: &'static str| if show { name } else { "" };
    if lowest {
        frame.draw_below(canvas, names(lowest, "East (m)"));
    }
    if leftmost {
        frame.draw_left(canvas, names(leftmost, "North (m)"));
    }
    let outline = |points: &[[f64; 2]]| -> Vec<(f64, f64)> {
        points.iter().chain(points.first()).filter_map(|p| frame.at(p[0], p[1])).collect()
    };
    if !result.site.boundary_enu_m.is_empty() {
        canvas.dashed(&outline(&result.site.boundary_enu_m), &[30.0, 16.0], INK, 4);
    }
    for ground in &result.site.exclusions_enu_m {
        let line = outline(ground);
        canvas.fill(&line, PALE.mix(0.8).filled());
    }
    if let Some(at) = result.site.control_house_enu_m.and_then(|[e, n]| frame.at(e, n)) {
        house(canvas, at);
    }
    for telescope in &map.telescopes {
        let kind = kinds.iter().position(|kind| *kind == telescope.kind).unwrap_or(0);
        if let Some(at) = frame.at(telescope.east_m, telescope.north_m) {
            canvas.marker(at, symbol_size(telescope.mirror_area_m2), look(kind));
        }
    }
    frame.draw_outline(canvas);
}

pub(super) fn symbol_size(mirror_area_m2: f64) -> f64 {
    (2.4 * mirror_area_m2.sqrt()).clamp(11.0, 42.0)
}

pub(super) fn house(canvas: &Canvas<'_>, (x, y): (f64, f64)) {
    let corners = [
        (x - 20.0, y + 18.0),
        (x - 20.0, y - 6.0),
        (x, y - 24.0),
        (x + 20.0, y - 6.0),
        (x + 20.0, y + 18.0),
    ];
    canvas.fill(&corners, INK.mix(0.75).filled());
}

pub(super) fn draw_key(canvas: &Canvas<'_>, result: &PlanResult, kinds: &[&str], y: f64) {
    let mut x = LEFT;
    for (index, kind) in kinds.iter().enumerate() {
        let area = result.kinds.iter().find(|row| row.kind == *kind).map(|row| row.mirror_area_m2);
        canvas.marker((x + 30.0, y), symbol_size(area.unwrap_or(30.0)), look(index));
        canvas.text(kind, (x + 85.0, y), LABEL_FONT, Side::Left);
        x += 170.0 + 29.0 * kind.chars().count() as f64;
    }
    if result.site.control_house_enu_m.is_some() && x < f64::from(WIDTH) - 900.0 {
        house(canvas, (x + 30.0, y));
        canvas.text("control house", (x + 70.0, y), LABEL_FONT, Side::Left);
        x += 480.0;
    }
    if !result.site.exclusions_enu_m.is_empty() && x < f64::from(WIDTH) - 420.0 {
        let corners = [(x, y - 20.0), (x + 50.0, y - 20.0), (x + 50.0, y + 20.0), (x, y + 20.0)];
        canvas.fill(&corners, PALE.mix(0.8).filled());
        canvas.text("excluded ground", (x + 70.0, y), LABEL_FONT, Side::Left);
    }
}
