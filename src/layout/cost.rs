//! What a layout costs.

/// Price of one telescope of a kind.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct KindPrice {
    /// Telescope with its camera.
    pub telescope: f64,
    /// Foundation, power and network at its pad.
    pub pad: f64,
}

impl KindPrice {
    /// From mirror area and pixels by the power law of array studies,
    /// telescope = reference x (A / A0)^1.35 + pixels x price per pixel + fixed.
    ///
    /// A^1.35 is D^2.7 for a dish of diameter D.
    ///
    /// # Validity
    /// Published exponents for optical telescopes run from D^1.7 to D^3.0 (Oram et al. 2008, Proc.
    /// SPIE 7017), D^2.8 and D^2.5 before and after 1980 (van Belle, Meinel & Meinel 2004,
    /// arXiv:2107.09605): the law ranks, it does not budget.
    ///
    /// # Source
    /// Cost of Cherenkov arrays, N (a A^1.35 + b pixels + c): array design papers, from memory,
    /// exponent to 30 %.
    pub fn of_mirror(
        mirror_area_m2: f64,
        reference: (f64, f64),
        (pixels, per_pixel): (usize, f64),
        (fixed, pad): (f64, f64),
    ) -> Self {
        let (reference_area_m2, reference_cost) = reference;
        let mirror = reference_cost * (mirror_area_m2 / reference_area_m2).powf(1.35);
        Self { telescope: mirror + pixels as f64 * per_pixel + fixed, pad }
    }
}

/// Prices of a study, in any one currency.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Tariff {
    /// By kind.
    pub kinds: Vec<KindPrice>,
    /// Cable trench, per metre.
    pub trench_per_m: f64,
    /// Telescopes that stand already (position in m, kind): free, and joined to the trench.
    pub built: Vec<([f64; 3], usize)>,
    /// Where the trench ends, east, north, up, m; none leaves the trench among telescopes only.
    pub control_house_m: Option<[f64; 3]>,
}

impl Tariff {
    /// Cost of telescopes (position in m, kind) that do not stand already: telescopes, pads and the
    /// shortest trench.
    pub fn cost(&self, placed: &[([f64; 3], usize)]) -> f64 {
        let of =
            |(_, kind): &([f64; 3], usize)| self.kinds[*kind].telescope + self.kinds[*kind].pad;
        let new = || placed.iter().filter(|telescope| !self.built.contains(telescope));
        let telescopes: f64 = new().map(of).sum();
        if self.trench_per_m == 0.0 {
            return telescopes;
        }
        // What stands is joined already: new trench is what the whole tree needs beyond that.
        let old = self.built.iter().map(|(position, _)| *position).chain(self.control_house_m);
        let old: Vec<[f64; 3]> = old.collect();
        let mut all = old.clone();
        all.extend(new().map(|(position, _)| *position));
        telescopes + self.trench_per_m * (trench_m(&all) - trench_m(&old)).max(0.0)
    }
}

/// Length of the shortest trench that joins all places, m: the minimum spanning tree.
///
/// # Source
/// Prim 1957, Bell Syst. Tech. J. 36, 1389.
pub fn trench_m(places_m: &[[f64; 3]]) -> f64 {
    let apart = |a: [f64; 3], b: [f64; 3]| -> f64 {
        (0..3).map(|axis| (a[axis] - b[axis]).powi(2)).sum::<f64>().sqrt()
    };
    let Some((&first, rest)) = places_m.split_first() else { return 0.0 };
    let mut open: Vec<([f64; 3], f64)> = rest.iter().map(|&p| (p, apart(p, first))).collect();
    let mut length = 0.0;
    while let Some(nearest) = (0..open.len()).min_by(|&a, &b| open[a].1.total_cmp(&open[b].1)) {
        let (joined, distance) = open.swap_remove(nearest);
        length += distance;
        for (place, nearest) in &mut open {
            *nearest = nearest.min(apart(*place, joined));
        }
    }
    length
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_trench_of_a_square_is_three_sides_and_the_law_is_a_power() {
        let square = [[0.0, 0.0, 0.0], [100.0, 0.0, 0.0], [100.0, 100.0, 0.0], [0.0, 100.0, 0.0]];
        assert!((trench_m(&square) - 300.0).abs() < 1e-9);
        let price = |area| KindPrice::of_mirror(area, (100.0, 1.0), (0, 0.0), (0.0, 0.0)).telescope;
        // Twice the diameter is four times the area: 2^2.7.
        assert!((price(400.0) / price(100.0) - 2.0_f64.powf(2.7)).abs() < 1e-12);
    }
}
