//! Interpolation in tables.

/// A function tabulated on a uniform grid, read by linear interpolation.
///
/// Outside the grid the end values are returned by [`UniformTable::value`]; callers that must
/// count such look-ups ask [`UniformTable::contains`] first.
#[derive(Clone, Debug)]
pub struct UniformTable {
    start: f64,
    inverse_step: f64,
    values: Vec<f64>,
}

impl UniformTable {
    /// Tabulates `function` at `count` points from `start` to `end`; `count` is at least 2.
    pub fn new(start: f64, end: f64, count: usize, function: impl FnMut(f64) -> f64) -> Self {
        assert!(count >= 2 && end > start, "a table needs two points and a positive width");
        let step = (end - start) / (count - 1) as f64;
        let values = (0..count).map(|index| start + step * index as f64).map(function).collect();
        Self { start, inverse_step: 1.0 / step, values }
    }

    /// The tabulated function at `position`, held constant beyond the ends.
    #[inline]
    pub fn value(&self, position: f64) -> f64 {
        let last = self.values.len() - 2;
        let place = ((position - self.start) * self.inverse_step).max(0.0);
        let index = (place as usize).min(last);
        let fraction = (place - index as f64).min(1.0);
        let low = self.values[index];
        low + fraction * (self.values[index + 1] - low)
    }

    /// Whether `position` lies on the grid.
    pub fn contains(&self, position: f64) -> bool {
        let place = (position - self.start) * self.inverse_step;
        (0.0..=(self.values.len() - 1) as f64).contains(&place)
    }
}

/// The exact inverse of a strictly falling [`UniformTable`]: a first guess from a table, then the
/// straight line that holds the value.
#[derive(Clone, Debug)]
pub struct FallingInverse {
    start: f64,
    inverse_step: f64,
    cells: Vec<u32>,
}

impl FallingInverse {
    /// Prepares the inverse with `count` guesses, at least 2.
    pub fn new(table: &UniformTable, count: usize) -> Self {
        assert!(table.values.windows(2).all(|pair| pair[1] < pair[0]), "the table must fall");
        let last = table.values.len() - 1;
        let (high, low) = (table.values[0], table.values[last]);
        let step = (high - low) / (count - 1) as f64;
        let cell = |index: usize| {
            let value = low + step * index as f64;
            let above = table.values.partition_point(|found| *found >= value);
            above.saturating_sub(1).min(last - 1) as u32
        };
        Self { start: low, inverse_step: 1.0 / step, cells: (0..count).map(cell).collect() }
    }

    /// The position at which `table`, the one it was made for, has `value`; its ends outside.
    #[inline]
    pub fn position(&self, table: &UniformTable, value: f64) -> f64 {
        let values = &table.values;
        let last = values.len() - 1;
        let guess = ((value - self.start) * self.inverse_step).max(0.0) as usize;
        let mut cell = self.cells[guess.min(self.cells.len() - 1)] as usize;
        while cell > 0 && values[cell] < value {
            cell -= 1;
        }
        while cell + 1 < last && values[cell + 1] > value {
            cell += 1;
        }
        let share = (values[cell] - value) / (values[cell] - values[cell + 1]);
        table.start + (cell as f64 + share.clamp(0.0, 1.0)) / table.inverse_step
    }
}

/// Linear interpolation of `(x, y)` points sorted by x; zero outside, as for efficiency curves.
pub fn linear_or_zero(points: &[(f64, f64)], position: f64) -> f64 {
    let upper = points.partition_point(|(x, _)| *x < position);
    if upper == 0 {
        return points.first().filter(|(x, _)| *x == position).map_or(0.0, |(_, y)| *y);
    }
    let Some(&(x1, y1)) = points.get(upper) else { return 0.0 };
    let (x0, y0) = points[upper - 1];
    y0 + (y1 - y0) * (position - x0) / (x1 - x0)
}
