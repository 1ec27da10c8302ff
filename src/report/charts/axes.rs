//! Axes with ticks that people read: powers of ten on logarithmic ones, round steps on linear ones.

use super::canvas::{Canvas, Side};
use super::style::{GRID, INK, LABEL_FONT, TICK_FONT};

/// A scale from values to places.
#[derive(Clone, Copy, Debug)]
pub(super) struct Scale {
    low: f64,
    high: f64,
    log: bool,
}

impl Scale {
    /// A linear scale that holds some values, widened to round ends.
    pub fn linear(values: impl IntoIterator<Item = f64>) -> Self {
        let (low, high) = span(values, |value| value.is_finite());
        let (low, high) = if low < high { (low, high) } else { (low - 0.5, low + 0.5) };
        let step = round_step((high - low) / 5.0);
        Self { low: (low / step).floor() * step, high: (high / step).ceil() * step, log: false }
    }

    /// A linear scale with exactly these ends.
    pub fn between(low: f64, high: f64) -> Self {
        Self { low, high, log: false }
    }

    /// A logarithmic scale over whole decades that holds some positive values, at most `decades`
    /// below the largest.
    pub fn logarithmic(values: impl IntoIterator<Item = f64>, decades: f64) -> Self {
        let (low, high) = span(values, |value| value.is_finite() && *value > 0.0);
        let (low, high) = if low <= high { (low, high) } else { (1.0, 10.0) };
        let top = (high.log10() - 1e-9).ceil();
        let bottom = (low.log10() + 1e-9).floor().max(top - decades).min(top - 1.0);
        Self { low: bottom, high: top, log: true }
    }

    /// Place of a value: 0 at the low end, 1 at the high end; `None` if it cannot be shown.
    pub fn place(&self, value: f64) -> Option<f64> {
        let value = if self.log { (value > 0.0).then(|| value.log10())? } else { value };
        let place = (value - self.low) / (self.high - self.low);
        (-1e-6..=1.0 + 1e-6).contains(&place).then_some(place)
    }

    /// Place of a value, held inside the scale.
    pub fn place_inside(&self, value: f64) -> f64 {
        let value = if self.log { value.max(1e-300).log10() } else { value };
        ((value - self.low) / (self.high - self.low)).clamp(0.0, 1.0)
    }

    /// Places of ticks with their labels; a label is empty on a minor tick.
    pub fn ticks(&self) -> Vec<(f64, String)> {
        if self.log { self.log_ticks() } else { self.linear_ticks() }
    }

    fn linear_ticks(&self) -> Vec<(f64, String)> {
        let step = round_step((self.high - self.low) / 5.0);
        let first = (self.low / step - 1e-6).ceil() as i64;
        let last = (self.high / step + 1e-6).floor() as i64;
        let digits = (-step.log10().floor()).max(0.0) as usize;
        let label = |index: i64| {
            let value = index as f64 * step;
            let text = format!("{value:.digits$}").replace('-', "\u{2212}");
            ((value - self.low) / (self.high - self.low), text)
        };
        (first..=last).map(label).collect()
    }

    fn log_ticks(&self) -> Vec<(f64, String)> {
        let span = self.high - self.low;
        let every = (span / 7.0).ceil().max(1.0) as i32;
        let mut ticks = Vec::new();
        for decade in self.low.floor() as i32..=self.high.ceil() as i32 {
            for digit in 1..10 {
                let place = (f64::from(decade) + f64::from(digit).log10() - self.low) / span;
                if !(-1e-9..=1.0 + 1e-9).contains(&place) || (digit > 1 && every > 1) {
                    continue;
                }
                let named = digit == 1 && decade.rem_euclid(every) == 0;
                let labelled_digit = span < 1.6 && (digit == 2 || digit == 5);
                let label = match (named, labelled_digit) {
                    (true, _) => power_of_ten(decade),
                    (_, true) => format!("{digit}\u{00d7}{}", power_of_ten(decade)),
                    _ => String::new(),
                };
                ticks.push((place, label));
            }
        }
        ticks
    }
}

fn span(values: impl IntoIterator<Item = f64>, fits: impl Fn(&f64) -> bool) -> (f64, f64) {
    values
        .into_iter()
        .filter(fits)
        .fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), v| (low.min(v), high.max(v)))
}

/// 1, 2 or 5 times a power of ten, not below `least`.
fn round_step(least: f64) -> f64 {
    let power = 10.0_f64.powf(least.log10().floor());
    let steps = [1.0, 2.0, 5.0, 10.0].map(|digit| digit * power);
    steps.into_iter().find(|step| *step >= least * (1.0 - 1e-9)).unwrap_or(10.0 * power)
}

/// `10` with a superscript exponent; 1 and 10 as they are.
pub(super) fn power_of_ten(exponent: i32) -> String {
    match exponent {
        0 => "1".into(),
        1 => "10".into(),
        _ => {
            let raised = |c: char| match c {
                '-' => '\u{207b}',
                '1' => '\u{00b9}',
                '2' => '\u{00b2}',
                '3' => '\u{00b3}',
                digit => char::from_u32(0x2070 + digit as u32 - '0' as u32).unwrap_or(digit),
            };
            format!("10{}", exponent.to_string().chars().map(raised).collect::<String>())
        }
    }
}

/// The rectangle that data are drawn in.
#[derive(Clone, Copy, Debug)]
pub(super) struct Frame {
    pub left: f64,
    pub right: f64,
    pub top: f64,
    pub bottom: f64,
    pub x: Scale,
    pub y: Scale,
}

impl Frame {
    /// Drawing place of a point, if both its coordinates can be shown.
    pub fn at(&self, x: f64, y: f64) -> Option<(f64, f64)> {
        let (x, y) = (self.x.place(x)?, self.y.place(y)?);
        Some((self.across(x), self.up(y)))
    }

    fn across(&self, place: f64) -> f64 {
        self.left + place * (self.right - self.left)
    }

    fn up(&self, place: f64) -> f64 {
        self.bottom - place * (self.bottom - self.top)
    }

    /// Drawing heights of an error bar, cut at the frame.
    pub fn bar(&self, low: f64, high: f64) -> (f64, f64) {
        (self.up(self.y.place_inside(low)), self.up(self.y.place_inside(high)))
    }

    /// Drawing places across of an error bar, cut at the frame.
    pub fn bar_across(&self, low: f64, high: f64) -> (f64, f64) {
        (self.across(self.x.place_inside(low)), self.across(self.x.place_inside(high)))
    }

    /// Grid and ticks below the data.
    pub fn draw_below(&self, canvas: &Canvas<'_>, x_name: &str) {
        for (place, label) in self.x.ticks() {
            let x = self.across(place);
            let (grid, tick) = if label.is_empty() { (false, 14.0) } else { (true, 26.0) };
            if grid {
                canvas.line(&[(x, self.top), (x, self.bottom)], GRID, 3);
            }
            canvas.line(&[(x, self.bottom), (x, self.bottom + tick)], INK, 4);
            canvas.text(&label, (x, self.bottom + 58.0), TICK_FONT, Side::Middle);
        }
        let middle = 0.5 * (self.left + self.right);
        canvas.text(x_name, (middle, self.bottom + 128.0), LABEL_FONT, Side::Middle);
    }

    /// Grid and ticks left of the data.
    pub fn draw_left(&self, canvas: &Canvas<'_>, y_name: &str) {
        self.draw_left_unnamed(canvas);
        let middle = 0.5 * (self.top + self.bottom);
        canvas.text_upward(y_name, (self.left - 222.0, middle), LABEL_FONT);
    }

    /// Grid and ticks left of the data, without the axis's name.
    pub fn draw_left_unnamed(&self, canvas: &Canvas<'_>) {
        for (place, label) in self.y.ticks() {
            let y = self.up(place);
            let (grid, tick) = if label.is_empty() { (false, 14.0) } else { (true, 26.0) };
            if grid {
                canvas.line(&[(self.left, y), (self.right, y)], GRID, 3);
            }
            canvas.line(&[(self.left - tick, y), (self.left, y)], INK, 4);
            canvas.text(&label, (self.left - 38.0, y), TICK_FONT, Side::Right);
        }
    }

    /// The frame's outline.
    pub fn draw_outline(&self, canvas: &Canvas<'_>) {
        let (l, r, t, b) = (self.left, self.right, self.top, self.bottom);
        canvas.line(&[(l, t), (r, t), (r, b), (l, b), (l, t)], INK, 5);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn powers_of_ten_are_written_with_superscripts() {
        assert_eq!(power_of_ten(-12), "10\u{207b}\u{00b9}\u{00b2}");
        assert_eq!(power_of_ten(6), "10\u{2076}");
        assert_eq!((power_of_ten(0), power_of_ten(1)), ("1".into(), "10".into()));
    }

    #[test]
    fn scales_hold_their_values_and_refuse_what_they_cannot_show() {
        let scale = Scale::logarithmic([0.0, f64::NAN, 3.0, 4e4], 12.0);
        assert_eq!((scale.place(1.0), scale.place(1e5)), (Some(0.0), Some(1.0)));
        assert_eq!(
            (scale.place(0.0), scale.place(-1.0), scale.place(f64::NAN)),
            (None, None, None)
        );
        let linear = Scale::linear([0.3, 9.7]);
        assert_eq!((linear.place(0.0), linear.place(10.0)), (Some(0.0), Some(1.0)));
        for empty in [Scale::logarithmic([], 6.0), Scale::linear([2.0])] {
            assert!(empty.ticks().len() > 1);
        }
    }
}
