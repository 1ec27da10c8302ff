//! Score over mirror area and spacing.

use plotters::style::{Color, RGBColor, WHITE};

use super::canvas::{Canvas, Side, svg};
use super::curves::shortened;
use super::style::{INK, LABEL_FONT, TICK_FONT};
use crate::report::figures;
use crate::report::result::{PlanResult, ScanRow};

const LEFT: f64 = 330.0;
const RIGHT: f64 = 2250.0;
const CELL: f64 = 190.0;
/// Probability under which a place cannot be told from the best.
const DECISIVE: f64 = 0.95;
const PALE: [f64; 3] = [236.0, 243.0, 250.0];
const DEEP: [f64; 3] = [8.0, 56.0, 112.0];

/// A heat map for each family with at least two mirror areas and two spacings; none if there is
/// no such family. One hue from pale to deep, so that it reads in grey; the score stands in each
/// cell.
pub fn scan_chart(result: &PlanResult) -> Option<String> {
    let mut families: Vec<&str> = result.scans.iter().map(|row| row.family.as_str()).collect();
    families.sort_unstable();
    families.dedup();
    let grids: Vec<Grid<'_>> = families
        .into_iter()
        .map(|family| Grid::new(family, &result.scans))
        .filter(|grid| grid.areas.len() > 1 && grid.spacings.len() > 1)
        .collect();
    let height = grids.iter().map(Grid::height).sum::<f64>();
    (!grids.is_empty()).then(|| {
        svg(height as u32, "Score over mirror area and spacing", |canvas| {
            let mut top = 0.0;
            for grid in &grids {
                grid.draw(canvas, top, &result.provenance.score);
                top += grid.height();
            }
        })
    })
}

struct Grid<'a> {
    family: &'a str,
    rows: Vec<&'a ScanRow>,
    areas: Vec<f64>,
    spacings: Vec<f64>,
}

fn distinct(values: impl Iterator<Item = f64>) -> Vec<f64> {
    let mut values: Vec<f64> = values.collect();
    values.sort_by(f64::total_cmp);
    values.dedup();
    values
}

impl<'a> Grid<'a> {
    fn new(family: &'a str, scans: &'a [ScanRow]) -> Self {
        let rows: Vec<&ScanRow> = scans.iter().filter(|row| row.family == family).collect();
        let areas = distinct(rows.iter().map(|row| row.mirror_area_m2));
        let spacings = distinct(rows.iter().map(|row| row.spacing_m));
        Self { family, rows, areas, spacings }
    }

    fn height(&self) -> f64 {
        CELL * self.areas.len() as f64 + 400.0
    }

    /// Largest area on top.
    fn draw(&self, canvas: &Canvas<'_>, top: f64, score: &str) {
        let title = format!("{}: {score}", shortened(self.family, 40));
        canvas.text(&title, (LEFT, top + 60.0), LABEL_FONT, Side::Left);
        let (top, width) = (top + 120.0, (RIGHT - LEFT) / self.spacings.len() as f64);
        let bottom = top + CELL * self.areas.len() as f64;
        let ends = self.rows.iter().map(|row| row.score).filter(|score| score.is_finite());
        let (low, high) = ends
            .fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), score| (l.min(score), h.max(score)));
        for (row, &area) in self.areas.iter().rev().enumerate() {
            let y = top + CELL * row as f64;
            canvas.text(
                &figures::short(area),
                (LEFT - 30.0, y + 0.5 * CELL),
                TICK_FONT,
                Side::Right,
            );
            for (column, &spacing) in self.spacings.iter().enumerate() {
                let x = LEFT + width * column as f64;
                let same = |row: &&&ScanRow| row.mirror_area_m2 == area && row.spacing_m == spacing;
                if let Some(found) = self.rows.iter().find(same) {
                    cell(canvas, (x, y, width), found, (low, high));
                }
            }
        }
        for (column, spacing) in self.spacings.iter().enumerate() {
            let x = LEFT + width * (column as f64 + 0.5);
            canvas.text(&figures::short(*spacing), (x, bottom + 55.0), TICK_FONT, Side::Middle);
        }
        let middle = 0.5 * (LEFT + RIGHT);
        canvas.text("Spacing (m)", (middle, bottom + 125.0), LABEL_FONT, Side::Middle);
        canvas.text_upward("Mirror area (m\u{00b2})", (80.0, 0.5 * (top + bottom)), LABEL_FONT);
        legend(canvas, (top, bottom), (low, high));
    }
}

fn shade(share: f64) -> RGBColor {
    let mixed = |channel: usize| {
        (PALE[channel] + share.clamp(0.0, 1.0) * (DEEP[channel] - PALE[channel])).round() as u8
    };
    RGBColor(mixed(0), mixed(1), mixed(2))
}

fn rectangle(x: f64, y: f64, width: f64, height: f64) -> [(f64, f64); 4] {
    [(x, y), (x + width, y), (x + width, y + height), (x, y + height)]
}

fn cell(
    canvas: &Canvas<'_>,
    (x, y, width): (f64, f64, f64),
    row: &ScanRow,
    (low, high): (f64, f64),
) {
    let share = if high > low { (row.score - low) / (high - low) } else { 0.5 };
    canvas.fill(&rectangle(x + 3.0, y + 3.0, width - 6.0, CELL - 6.0), shade(share).filled());
    let ink = if share > 0.45 { RGBColor(255, 255, 255) } else { INK };
    let text = figures::with_error(row.score, row.score_error);
    let (value, error) = text.split_once(" \u{b1} ").unwrap_or((&text, ""));
    let middle = x + 0.5 * width;
    canvas.inked(value, (middle, y + 0.36 * CELL), TICK_FONT, Side::Middle, ink);
    if !error.is_empty() {
        let error = format!("\u{b1} {error}");
        canvas.inked(&error, (middle, y + 0.68 * CELL), TICK_FONT, Side::Middle, ink);
    }
    if row.behind_best == 0.0 {
        let mut frame = rectangle(x + 12.0, y + 12.0, width - 24.0, CELL - 24.0).to_vec();
        frame.push(frame[0]);
        canvas.line(&frame, ink, 8);
    } else if row.behind_best < DECISIVE {
        for corner in [(x + 30.0, y + 30.0), (x + width - 30.0, y + 30.0)] {
            canvas.disc(corner, 12.0, ink.filled());
        }
    }
}

/// A bar of shades with its ends, and what the marks mean.
fn legend(canvas: &Canvas<'_>, (top, bottom): (f64, f64), (low, high): (f64, f64)) {
    const STEPS: usize = 24;
    let (x, height) = (RIGHT + 60.0, (bottom - top) / STEPS as f64);
    for step in 0..STEPS {
        let share = (step as f64 + 0.5) / STEPS as f64;
        let y = bottom - height * (step + 1) as f64;
        canvas.fill(&rectangle(x, y, 70.0, height + 1.0), shade(share).filled());
    }
    canvas.text(&figures::short(high), (x + 90.0, top + 20.0), TICK_FONT, Side::Left);
    canvas.text(&figures::short(low), (x + 90.0, bottom - 20.0), TICK_FONT, Side::Left);
    let y = bottom + 200.0;
    let frame = [
        (LEFT, y - 24.0),
        (LEFT + 60.0, y - 24.0),
        (LEFT + 60.0, y + 24.0),
        (LEFT, y + 24.0),
        (LEFT, y - 24.0),
    ];
    canvas.fill(&frame[..4], WHITE.filled());
    canvas.line(&frame, INK, 8);
    canvas.text("best", (LEFT + 90.0, y), TICK_FONT, Side::Left);
    canvas.disc((LEFT + 330.0, y), 12.0, INK.filled());
    canvas.disc((LEFT + 370.0, y), 12.0, INK.filled());
    canvas.text("not told apart from the best", (LEFT + 410.0, y), TICK_FONT, Side::Left);
}
