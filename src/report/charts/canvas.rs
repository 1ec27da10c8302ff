//! A drawing surface of plain strokes and texts.

use plotters::backend::SVGBackend;
use plotters::coord::Shift;
use plotters::drawing::{DrawingArea, IntoDrawingArea};
use plotters::element::{Circle, Drawable, PathElement, PointCollection, Polygon};
use plotters::style::text_anchor::{HPos, Pos, VPos};
use plotters::style::{Color, FontTransform, IntoFont, RGBColor, ShapeStyle, TextStyle};

use super::style::{INK, Look, Marker};

/// Width of every chart in drawing units and on paper.
pub(super) const WIDTH: u32 = 2690;
const PAPER_WIDTH_MM: f64 = 178.0;

type Area<'a> = DrawingArea<SVGBackend<'a>, Shift>;

/// Draws a chart of some height and gives its SVG.
pub(super) fn svg(height: u32, title: &str, draw: impl Fn(&Canvas<'_>)) -> String {
    let mut text = String::new();
    {
        let area = SVGBackend::with_string(&mut text, (WIDTH, height)).into_drawing_area();
        draw(&Canvas { area });
    }
    let paper_height = PAPER_WIDTH_MM * f64::from(height) / f64::from(WIDTH);
    let head = format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 {WIDTH} {height}\" \
         width=\"{PAPER_WIDTH_MM}mm\" height=\"{paper_height:.1}mm\" role=\"img\" \
         aria-label=\"{title}\" font-family=\"DejaVu Sans, Helvetica, Arial, sans-serif\">\n\
         <rect width=\"100%\" height=\"100%\" fill=\"#FFFFFF\"/>\n"
    );
    let body = text.find("<svg").and_then(|at| text[at..].find('>').map(|end| at + end + 1));
    let body = text.get(body.unwrap_or(0)..).unwrap_or_default();
    format!("{head}{}", body.trim_start()).replace(" font-family=\"sans-serif\"", "")
}

/// Horizontal place of a text relative to its point.
#[derive(Clone, Copy)]
pub(super) enum Side {
    Left,
    Middle,
    Right,
}

pub(super) struct Canvas<'a> {
    area: Area<'a>,
}

impl<'a> Canvas<'a> {
    /// Writing to memory cannot fail; a fault would be one of the backend.
    fn put<E>(&self, element: &E)
    where
        for<'b> &'b E: PointCollection<'b, (i32, i32)>,
        E: Drawable<SVGBackend<'a>>,
    {
        self.area.draw(element).expect("drawing to memory does not fail");
    }

    /// A line through points.
    pub fn line(&self, points: &[(f64, f64)], colour: RGBColor, width: u32) {
        let points: Vec<_> =
            points.iter().map(|(x, y)| (x.round() as i32, y.round() as i32)).collect();
        self.put(&PathElement::new(points, colour.stroke_width(width)));
    }

    /// A line of dashes: lengths drawn and left out in turn.
    pub fn dashed(&self, points: &[(f64, f64)], dash: &[f64], colour: RGBColor, width: u32) {
        if dash.is_empty() {
            return self.line(points, colour, width);
        }
        let (mut index, mut left) = (0, dash[0]);
        let mut stroke: Vec<(f64, f64)> = points.first().copied().into_iter().collect();
        for pair in points.windows(2) {
            let ((x0, y0), (x1, y1)) = (pair[0], pair[1]);
            let length = (x1 - x0).hypot(y1 - y0);
            let mut done = 0.0;
            while length - done > left {
                done += left;
                let at = (x0 + (x1 - x0) * done / length, y0 + (y1 - y0) * done / length);
                if index % 2 == 0 {
                    stroke.push(at);
                    self.line(&stroke, colour, width);
                }
                stroke = vec![at];
                index = (index + 1) % dash.len();
                left = dash[index];
            }
            left -= length - done;
            if index % 2 == 0 {
                stroke.push((x1, y1));
            }
        }
        if index % 2 == 0 && stroke.len() > 1 {
            self.line(&stroke, colour, width);
        }
    }

    /// A filled polygon.
    pub fn fill(&self, points: &[(f64, f64)], style: ShapeStyle) {
        let points: Vec<_> =
            points.iter().map(|(x, y)| (x.round() as i32, y.round() as i32)).collect();
        self.put(&Polygon::new(points, style));
    }

    /// A disc or ring.
    pub fn disc(&self, (x, y): (f64, f64), radius: f64, style: ShapeStyle) {
        let centre = (x.round() as i32, y.round() as i32);
        self.put(&Circle::new(centre, radius.round().max(1.0) as i32, style));
    }

    /// A marker of a curve.
    pub fn marker(&self, at: (f64, f64), size: f64, look: Look) {
        let (x, y) = at;
        let (full, hollow) = (look.colour.filled(), plotters::style::WHITE.filled());
        let square = |s: f64| [(x - s, y - s), (x + s, y - s), (x + s, y + s), (x - s, y + s)];
        match look.marker {
            Marker::Disc => self.disc(at, size, full),
            Marker::Ring => {
                self.disc(at, size, full);
                self.disc(at, 0.5 * size, hollow);
            }
            Marker::Square => self.fill(&square(0.88 * size), full),
            Marker::Box => {
                self.fill(&square(0.88 * size), full);
                self.fill(&square(0.42 * size), hollow);
            }
            Marker::Triangle => {
                let s = 1.15 * size;
                self.fill(&[(x, y - s), (x + s, y + 0.7 * s), (x - s, y + 0.7 * s)], full);
            }
            Marker::Diamond => {
                let s = 1.25 * size;
                self.fill(&[(x, y - s), (x + s, y), (x, y + s), (x - s, y)], full);
            }
        }
    }

    /// A line of text, centred vertically on its point.
    pub fn text(&self, text: &str, at: (f64, f64), size: i32, side: Side) {
        self.write(text, at, (size, INK), side, FontTransform::None);
    }

    /// A line of text in a colour.
    pub fn inked(&self, text: &str, at: (f64, f64), size: i32, side: Side, ink: RGBColor) {
        self.write(text, at, (size, ink), side, FontTransform::None);
    }

    /// A text that reads upward, centred on its point.
    pub fn text_upward(&self, text: &str, at: (f64, f64), size: i32) {
        self.write(text, at, (size, INK), Side::Middle, FontTransform::Rotate270);
    }

    fn write(
        &self,
        text: &str,
        at: (f64, f64),
        (size, ink): (i32, RGBColor),
        side: Side,
        turn: FontTransform,
    ) {
        let h = match side {
            Side::Left => HPos::Left,
            Side::Middle => HPos::Center,
            Side::Right => HPos::Right,
        };
        let font = ("sans-serif", size).into_font().transform(turn);
        let style = TextStyle::from(font).color(&ink).pos(Pos::new(h, VPos::Center));
        let at = (at.0.round() as i32, at.1.round() as i32);
        self.area.draw_text(text, &style, at).expect("drawing to memory does not fail");
    }
}
