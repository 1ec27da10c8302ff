//! Cherenkov light against distance from the shower axis.

use super::axes::{Frame, Scale};
use super::canvas::svg;
use super::curves::{Curve, draw_curve, legend};
use super::style::look;
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
    let all = || curves.iter().flat_map(|curve| &curve.points);
    let x = Scale::linear(all().map(|point| point[0]).chain([0.0]));
    let y = Scale::logarithmic(all().map(|point| point[1]), 7.0);
    let frame = Frame { left: 290.0, right: 2030.0, top: 50.0, bottom: 1250.0, x, y };
    svg(1420, "Cherenkov light pool", |canvas| {
        frame.draw_below(canvas, "Distance from the shower axis (m)");
        frame.draw_left(canvas, "Cherenkov photons per m\u{00b2}");
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
