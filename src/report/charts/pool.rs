//! Cherenkov light against distance from the shower axis.

use plotters::style::{Color, RGBColor};

use super::axes::{Frame, Scale};
use super::canvas::{Side, svg};
use super::curves::{Curve, draw_curve, legend};
use super::style::{TICK_FONT, look};
use crate::report::figures;
use crate::report::result::PlanResult;

/// Mean photon density against distance, by primary and energy.
pub fn light_pool_chart(result: &PlanResult) -> String {
    let mut curves: Vec<Curve> = Vec::new();
    let first_kind = result.light_pool.first().map(|row| row.kind.as_str()).unwrap_or_default();
    for row in result.light_pool.iter().filter(|row| row.kind == first_kind) {
        let name = format!("{} {}", row.primary, energy(row.energy_gev));
        let point = [row.distance_m, row.photons_m2, row.error_m2];
        match curves.iter_mut().find(|curve| curve.name == name) {
            Some(curve) => curve.points.push(point),
            None => curves.push(Curve { name, points: vec![point] }),
        }
    }
    distance_chart(&curves, "Cherenkov photons per m\u{00b2}")
}

/// One row of a pool: distance (m), mean, its error, shower-to-shower RMS.
pub type PoolPoint = [f64; 4];

/// Mean and shower-to-shower RMS of one primary against distance.
pub fn pool_chart(name: &str, y_name: &str, rows: &[PoolPoint]) -> String {
    let mean = rows.iter().map(|[distance, mean, error, _]| [*distance, *mean, *error]);
    let spread = rows.iter().map(|[distance, _, _, rms]| [*distance, *rms, 0.0]);
    let curves = [
        Curve { name: name.to_owned(), points: mean.collect() },
        Curve { name: "RMS of showers".to_owned(), points: spread.collect() },
    ];
    distance_chart(&curves, y_name)
}

/// A footprint: values on a square grid, rows from south to north, columns from west to east.
pub fn footprint_chart(half_width_m: f64, cells: usize, values: &[f64], unit: &str) -> String {
    let scale = || Scale::between(-half_width_m, half_width_m);
    let frame =
        Frame { left: 290.0, right: 1490.0, top: 50.0, bottom: 1250.0, x: scale(), y: scale() };
    let most = values.iter().copied().fold(0.0, f64::max);
    svg(1420, "Cherenkov light on the ground", |canvas| {
        let (width, height) = (1200.0 / cells as f64, 1200.0 / cells as f64);
        for (place, value) in values.iter().enumerate() {
            let (column, row) = ((place % cells) as f64, (place / cells) as f64);
            let (x, y) = (frame.left + column * width, frame.bottom - row * height);
            let shade = shade(if most > 0.0 { value / most } else { 0.0 });
            // Cells overlap a little, or the seams between them would show.
            let (right, upper) = (x + width + 2.0, y - height - 2.0);
            canvas.fill(&[(x, y), (right, y), (right, upper), (x, upper)], shade.filled());
        }
        frame.draw_below(canvas, "East of the core (m)");
        frame.draw_left(canvas, "North of the core (m)");
        frame.draw_outline(canvas);
        for step in 0..=4 {
            let share = f64::from(step) / 4.0;
            let y = 1150.0 - 220.0 * f64::from(step);
            let corners = [(1560.0, y), (1620.0, y), (1620.0, y - 60.0), (1560.0, y - 60.0)];
            canvas.fill(&corners, shade(share).filled());
            canvas.text(&figures::short(share * most), (1650.0, y - 30.0), TICK_FONT, Side::Left);
        }
        canvas.text(unit, (1560.0, 120.0), TICK_FONT, Side::Left);
    })
}

/// From white to a dark blue.
fn shade(share: f64) -> RGBColor {
    let mix = |dark: f64| (255.0 + share.clamp(0.0, 1.0) * (dark - 255.0)) as u8;
    RGBColor(mix(0.0), mix(60.0), mix(110.0))
}

fn distance_chart(curves: &[Curve], y_name: &str) -> String {
    let all = || curves.iter().flat_map(|curve| &curve.points);
    let x = Scale::linear(all().map(|point| point[0]).chain([0.0]));
    let y = Scale::logarithmic(all().map(|point| point[1]), 7.0);
    let frame = Frame { left: 290.0, right: 2030.0, top: 50.0, bottom: 1250.0, x, y };
    svg(1420, "Cherenkov light pool", |canvas| {
        frame.draw_below(canvas, "Distance from the shower axis (m)");
        frame.draw_left(canvas, y_name);
        for (index, curve) in curves.iter().enumerate().rev() {
            draw_curve(canvas, &frame, &curve.points, look(index), index, true);
        }
        frame.draw_outline(canvas);
        let names: Vec<&str> = curves.iter().map(|curve| curve.name.as_str()).collect();
        legend(canvas, 2070.0, 80.0, &names);
    })
}

/// An energy with the unit people use for it.
fn energy(gev: f64) -> String {
    if gev >= 1e3 { format!("{} TeV", gev / 1e3) } else { format!("{gev} GeV") }
}
