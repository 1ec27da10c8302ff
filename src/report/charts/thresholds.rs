//! Rates against the pixel threshold: the wall of the sky and the branch of showers.

use super::axes::{Frame, Scale};
use super::canvas::{Side, svg};
use super::curves::{Point, legend, runs};
use super::style::{INK, LINE, TICK_FONT, look};
use crate::report::thresholds::{ThresholdRow, ThresholdScan};

/// Decades that the chart shows at most.
const DECADES: f64 = 12.0;

/// One curve: its name and how it is read from a row, value and error.
type Reading = (&'static str, fn(&ThresholdRow) -> [f64; 2]);

const CURVES: [Reading; 5] = [
    ("sky, one telescope", |row| [row.accidental_rate_hz, 0.0]),
    ("showers, one telescope", |row| [row.shower_rate_hz, row.shower_rate_error_hz]),
    ("sky, array", |row| [row.array_accidental_rate_hz, 0.0]),
    ("showers, array", |row| [row.array_shower_rate_hz, row.array_shower_rate_error_hz]),
    ("one pixel", |row| [row.pixel_rate_hz, 0.0]),
];

/// The chart of a scan; a vertical line marks the lowest quiet threshold.
pub fn threshold_chart(scan: &ThresholdScan) -> String {
    let curves: Vec<Vec<Point>> = CURVES
        .iter()
        .map(|(_, read)| {
            let point = |row: &ThresholdRow| {
                let [value, error] = read(row);
                [row.threshold_pe, value, error]
            };
            scan.rows.iter().map(point).collect()
        })
        .collect();
    let ends = [scan.rows.first(), scan.rows.last()].into_iter().flatten();
    let ends: Vec<f64> = ends.map(|row| row.threshold_pe).collect();
    let x = match ends[..] {
        [low, high] => Scale::between(low, high),
        _ => Scale::linear(ends),
    };
    // Rates of less than one in three hours are not worth an axis.
    let shown = curves.iter().flatten().map(|point| point[1]).filter(|rate| *rate > 1e-4);
    let y = Scale::logarithmic(shown, DECADES);
    let frame = Frame { left: 290.0, right: 1740.0, top: 130.0, bottom: 1250.0, x, y };
    let title = format!("Trigger rates against threshold: {} in {}", scan.telescope, scan.layout);
    svg(1420, &escaped(&title), |canvas| {
        frame.draw_below(canvas, "Pixel threshold (photoelectrons)");
        frame.draw_left(canvas, "Rate (Hz)");
        let head = format!("{} in {}, {}", scan.telescope, scan.layout, scan.condition);
        canvas.text(&head, (290.0, 40.0), TICK_FONT, Side::Left);
        if let Ok(quiet) = &scan.quiet
            && let Some(place) = frame.x.place(quiet.threshold_pe)
        {
            let at = frame.left + place * (frame.right - frame.left);
            canvas.dashed(&[(at, frame.top), (at, frame.bottom)], &[30.0, 18.0], INK, 5);
            let label = format!("lowest quiet: {:.2} pe", quiet.threshold_pe);
            canvas.text(&label, (at, 98.0), TICK_FONT, Side::Middle);
        }
        for (index, points) in curves.iter().enumerate() {
            let look = look(index);
            for run in runs(&frame, points) {
                canvas.dashed(&run, look.dash, look.colour, LINE);
            }
            for (place, [x, rate, error]) in points.iter().enumerate() {
                let Some(at) = frame.at(*x, *rate) else { continue };
                if *error > 0.0 && place % 3 == 0 {
                    let (low, high) = frame.bar(rate - error, rate + error);
                    canvas.line(&[(at.0, low), (at.0, high)], look.colour, 4);
                }
                if place % 9 == 2 * index % 9 {
                    canvas.marker(at, 15.0, look);
                }
            }
        }
        frame.draw_outline(canvas);
        legend(canvas, 1780.0, 160.0, &CURVES.map(|(name, _)| name));
    })
}

/// A text that may stand in an attribute.
fn escaped(text: &str) -> String {
    text.replace('&', "&amp;").replace('<', "&lt;").replace('"', "&quot;")
}
