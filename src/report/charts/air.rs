//! Atmospheres beside the standard one: density and refractivity against altitude.

use super::axes::{Frame, Scale};
use super::canvas::{Canvas, Side, svg};
use super::curves::{legend, runs};
use super::style::{INK, LINE, TICK_FONT, look};

/// One atmosphere of [`air_chart`], at the same altitudes as the others.
#[derive(Clone, Debug)]
pub struct AirCurve {
    /// Its name.
    pub name: String,
    /// Altitudes, km.
    pub altitude_km: Vec<f64>,
    /// Density over that of the standard atmosphere.
    pub density_ratio: Vec<f64>,
    /// Refractivity less that of the standard atmosphere, 1e-6.
    pub refractivity_difference: Vec<f64>,
}

/// Two panels with altitude upward: density over that of the standard atmosphere, and refractivity
/// less that of the standard atmosphere. Curves beyond the standard's legend names keep their looks.
pub fn air_chart(curves: &[AirCurve], standard: &str, wavelength_nm: f64) -> String {
    let altitudes = curves.iter().flat_map(|curve| curve.altitude_km.iter().copied());
    let y = Scale::linear(altitudes.chain([0.0]));
    let values = |pick: fn(&AirCurve) -> &Vec<f64>| curves.iter().flat_map(pick).copied();
    let ratio = Scale::linear(values(|curve| &curve.density_ratio).chain([0.95, 1.05]));
    let difference =
        Scale::linear(values(|curve| &curve.refractivity_difference).chain([-1.0, 1.0]));
    let (top, bottom) = (60.0, 1_240.0);
    let left = Frame { left: 290.0, right: 1_060.0, top, bottom, x: ratio, y };
    let right = Frame { left: 1_200.0, right: 1_970.0, top, bottom, x: difference, y };
    svg(1_470, "Atmospheres beside the standard one", |canvas| {
        left.draw_left(canvas, "Altitude above the sea (km)");
        left.draw_below(canvas, &format!("Density / density of {standard}"));
        right.draw_left_unnamed(canvas);
        right.draw_below(canvas, "Refractivity n\u{2212}1 less that of");
        let (below, middle) = (bottom + 190.0, 0.5 * (right.left + right.right));
        let text = format!("{standard} (10\u{207b}\u{2076}, {wavelength_nm} nm)");
        canvas.text(&text, (middle, below), TICK_FONT + 4, Side::Middle);
        panel(canvas, &left, 1.0, curves, |curve| &curve.density_ratio);
        panel(canvas, &right, 0.0, curves, |curve| &curve.refractivity_difference);
        let names: Vec<&str> = curves.iter().map(|curve| curve.name.as_str()).collect();
        legend(canvas, 2_010.0, 80.0, &names);
    })
}

/// One panel: a thin line where the standard lies, and the curves with staggered markers.
fn panel(
    canvas: &Canvas<'_>,
    frame: &Frame,
    standard: f64,
    curves: &[AirCurve],
    values: fn(&AirCurve) -> &Vec<f64>,
) {
    if let Some(places) = frame.at(standard, 0.0).map(|(x, _)| [(x, frame.top), (x, frame.bottom)])
    {
        canvas.line(&places, INK, 3);
    }
    for (index, curve) in curves.iter().enumerate().rev() {
        let points = values(curve).iter().zip(&curve.altitude_km);
        let points: Vec<[f64; 3]> = points.map(|(x, y)| [*x, *y, 0.0]).collect();
        let look = look(index);
        for run in runs(frame, &points) {
            canvas.dashed(&run, look.dash, look.colour, LINE);
        }
        let every = (points.len() / 7).max(1);
        for point in points.iter().skip(every * (1 + index) / (2 + curves.len())).step_by(every) {
            if let Some(at) = frame.at(point[0], point[1]) {
                canvas.marker(at, 15.0, look);
            }
        }
    }
    frame.draw_outline(canvas);
}
