//! Effective area and differential rate against energy.

use super::SHOWN;
use super::axes::{Frame, Scale};
use super::canvas::{Canvas, Side, WIDTH, svg};
use super::style::{LINE, Look, PALE, TICK_FONT, look};
use crate::report::result::PlanResult;

/// One point of a curve: energy at the bin's middle, value, its error.
pub(super) type Point = [f64; 3];

/// A named curve.
pub(super) struct Curve {
    pub name: String,
    pub points: Vec<Point>,
}

/// Effective area of the reference gamma source's energies, by layout.
pub fn effective_area_chart(result: &PlanResult) -> String {
    let curves = by_layout(result, |name| {
        let rows = result.effective_areas.iter();
        let rows = rows.filter(|row| row.layout == name && row.primary == "gamma");
        rows.map(|row| [middle(row.energy_low_gev, row.energy_high_gev), row.area_m2, row.error_m2])
            .collect()
    });
    by_energy("Effective area by layout", "Effective area after trigger (m\u{00b2})", 7.0, &curves)
}

/// Differential trigger rate of the reference source, by layout.
pub fn differential_rate_chart(result: &PlanResult) -> String {
    let primary = result.differential_rates.first().map(|row| row.primary.clone());
    let primary = primary.unwrap_or_default();
    let curves = by_layout(result, |name| {
        let rows = result.differential_rates.iter();
        let rows = rows.filter(|row| row.layout == name && row.primary == primary);
        let point = |row: &crate::report::result::RateRow| {
            [middle(row.energy_low_gev, row.energy_high_gev), row.rate_hz_gev, row.error_hz_gev]
        };
        rows.map(point).collect()
    });
    by_energy("Differential trigger rate by layout", "Trigger rate dR/dE (Hz/GeV)", 7.0, &curves)
}

fn middle(low: f64, high: f64) -> f64 {
    (low * high).sqrt()
}

fn by_layout(result: &PlanResult, points: impl Fn(&str) -> Vec<Point>) -> Vec<Curve> {
    let curve = |row: &crate::report::result::LayoutRow| Curve {
        name: format!("{}  {}", row.rank, row.layout),
        points: points(&row.layout),
    };
    result.ranking.iter().map(curve).collect()
}

/// Curves against energy on two logarithmic axes.
fn by_energy(title: &str, y_name: &str, decades: f64, curves: &[Curve]) -> String {
    let of = |index: usize| curves.iter().flat_map(move |c| c.points.iter().map(move |p| p[index]));
    let shown = |axis: usize| {
        let points = curves.iter().flat_map(|curve| &curve.points).filter(|point| point[1] > 0.0);
        points.map(|point| point[axis]).collect::<Vec<_>>()
    };
    let x = Scale::logarithmic(shown(0), 12.0);
    let y = Scale::logarithmic(of(1), decades);
    let frame = Frame { left: 290.0, right: 1740.0, top: 50.0, bottom: 1250.0, x, y };
    svg(1420, title, |canvas| {
        frame.draw_below(canvas, "True energy (GeV)");
        frame.draw_left(canvas, y_name);
        for curve in curves.iter().skip(SHOWN) {
            for run in runs(&frame, &curve.points) {
                canvas.line(&run, PALE, 4);
            }
        }
        for (index, curve) in curves.iter().enumerate().take(SHOWN).rev() {
            draw_curve(canvas, &frame, &curve.points, look(index), index, true);
        }
        frame.draw_outline(canvas);
        let names: Vec<&str> = curves.iter().take(SHOWN).map(|curve| curve.name.as_str()).collect();
        legend(canvas, 1780.0, 80.0, &names);
        if curves.len() > SHOWN {
            let (y, rest) = (80.0 + 76.0 * SHOWN as f64, curves.len() - SHOWN);
            canvas.line(&[(1780.0, y), (1970.0, y)], PALE, 4);
            canvas.text(&format!("{rest} further layouts"), (1990.0, y), TICK_FONT, Side::Left);
        }
    })
}

/// Pieces of a curve without gaps: a bin of value zero is a gap.
pub(super) fn runs(frame: &Frame, points: &[Point]) -> Vec<Vec<(f64, f64)>> {
    let mut runs = vec![Vec::new()];
    for point in points {
        match (frame.at(point[0], point[1]), runs.last_mut()) {
            (Some(at), Some(run)) => run.push(at),
            (None, Some(run)) if !run.is_empty() => runs.push(Vec::new()),
            _ => {}
        }
    }
    runs.retain(|run| !run.is_empty());
    runs
}

/// A curve with error bars, and markers on every other point, staggered between curves.
pub(super) fn draw_curve(
    canvas: &Canvas<'_>,
    frame: &Frame,
    points: &[Point],
    look: Look,
    stagger: usize,
    bars: bool,
) {
    for run in runs(frame, points) {
        canvas.dashed(&run, look.dash, look.colour, LINE);
    }
    for (index, [x, y, error]) in points.iter().enumerate() {
        let Some(at) = frame.at(*x, *y) else { continue };
        if bars && *error > 0.0 {
            let (low, high) = frame.bar(y - error, y + error);
            canvas.line(&[(at.0, low), (at.0, high)], look.colour, 4);
        }
        if (index + stagger).is_multiple_of(2) {
            canvas.marker(at, 15.0, look);
        }
    }
}

/// Names beside samples of their curves, right of the data.
pub(super) fn legend(canvas: &Canvas<'_>, left: f64, top: f64, names: &[&str]) {
    let room = ((f64::from(WIDTH) - left - 205.0) / (0.5 * f64::from(TICK_FONT))) as usize;
    for (index, name) in names.iter().enumerate() {
        let (y, look) = (top + 76.0 * index as f64, look(index));
        canvas.dashed(&[(left, y), (left + 190.0, y)], look.dash, look.colour, LINE);
        canvas.marker((left + 95.0, y), 15.0, look);
        canvas.text(&shortened(name, room), (left + 210.0, y), TICK_FONT, Side::Left);
    }
}

/// At most `room` characters.
pub(super) fn shortened(name: &str, room: usize) -> String {
    if name.chars().count() <= room {
        return name.to_owned();
    }
    name.chars().take(room.saturating_sub(1)).chain(['\u{2026}']).collect()
}
