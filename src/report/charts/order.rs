//! The ranking with error bars.

use plotters::style::Color;

use super::axes::{Frame, Scale};
use super::canvas::{Canvas, Side, svg};
use super::curves::shortened;
use super::style::{INK, LABEL_FONT, Look, Marker, TICK_FONT, look};
use crate::report::result::{LayoutRow, PlanResult};

const ROW: f64 = 82.0;
const TOP: f64 = 110.0;

/// Gamma rate and background rate of each layout, best first, with standard errors; shading sets
/// tiers apart.
pub fn ranking_chart(result: &PlanResult) -> String {
    let rows = &result.ranking;
    let bottom = TOP + ROW * rows.len().max(1) as f64;
    let panel = |left: f64, right: f64, pick: fn(&LayoutRow) -> [f64; 2]| {
        let ends = rows.iter().flat_map(|row| {
            let [value, error] = pick(row);
            [value - error, value + error]
        });
        let x = Scale::linear(ends.chain([0.0]));
        Frame { left, right, top: TOP, bottom, x, y: Scale::between(0.0, 1.0) }
    };
    let gamma: fn(&LayoutRow) -> [f64; 2] = |row| [row.gamma_rate_hz, row.gamma_rate_error_hz];
    let other: fn(&LayoutRow) -> [f64; 2] =
        |row| [row.background_rate_hz, row.background_rate_error_hz];
    let panels = [
        (panel(900.0, 1740.0, gamma), gamma, "Gamma trigger rate (Hz)", look(0)),
        (
            panel(1830.0, 2620.0, other),
            other,
            "Background trigger rate (Hz)",
            Look { marker: Marker::Square, ..look(1) },
        ),
    ];
    svg((bottom + 170.0) as u32, "Ranking of layouts", |canvas| {
        canvas.text("Layout, best first", (40.0, 60.0), LABEL_FONT, Side::Left);
        shade_tiers(canvas, rows);
        for (frame, pick, name, look) in panels {
            frame.draw_below(canvas, name);
            for (index, row) in rows.iter().enumerate() {
                let y = TOP + ROW * (index as f64 + 0.5);
                let [value, error] = pick(row);
                if !(value.is_finite() && error.is_finite()) {
                    canvas.text("\u{2013}", (frame.left + 30.0, y), TICK_FONT, Side::Left);
                    continue;
                }
                let (low, high) = frame.bar_across(value - error, value + error);
                canvas.line(&[(low, y), (high, y)], look.colour, 8);
                for end in [low, high] {
                    canvas.line(&[(end, y - 14.0), (end, y + 14.0)], look.colour, 6);
                }
                canvas.marker((frame.bar_across(value, value).0, y), 16.0, look);
            }
            frame.draw_outline(canvas);
        }
        for (index, row) in rows.iter().enumerate() {
            let y = TOP + ROW * (index as f64 + 0.5);
            canvas.text(&row.rank.to_string(), (90.0, y), TICK_FONT, Side::Right);
            canvas.text(&shortened(&row.layout, 31), (115.0, y), TICK_FONT, Side::Left);
        }
    })
}

/// Every other tier gets a pale ground.
fn shade_tiers(canvas: &Canvas<'_>, rows: &[LayoutRow]) {
    for (index, _) in rows.iter().enumerate().filter(|(_, row)| row.tier % 2 == 0) {
        let (top, bottom) = (TOP + ROW * index as f64, TOP + ROW * (index + 1) as f64);
        let ground = INK.mix(0.055).filled();
        canvas.fill(&[(20.0, top), (2620.0, top), (2620.0, bottom), (20.0, bottom)], ground);
    }
}
