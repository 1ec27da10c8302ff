//! Numerical integration.

/// Nodes and weights of the 8-point Gauss-Legendre rule on [-1, 1].
///
/// # Source
/// Abramowitz & Stegun 1964, table 25.4.
const GAUSS_8: [(f64, f64); 4] = [
    (0.183_434_642_495_649_8, 0.362_683_783_378_362),
    (0.525_532_409_916_329, 0.313_706_645_877_887_3),
    (0.796_666_477_413_626_7, 0.222_381_034_453_374_5),
    (0.960_289_856_497_536_2, 0.101_228_536_290_376_3),
];

/// The integral of `function` from `start` to `end` by `panels` panels of the 8-point
/// Gauss-Legendre rule: exact for polynomials of degree 15 in each panel.
pub fn integrate(start: f64, end: f64, panels: usize, mut function: impl FnMut(f64) -> f64) -> f64 {
    let half = 0.5 * (end - start) / panels as f64;
    let mut sum = 0.0;
    for panel in 0..panels {
        let middle = start + half * (2 * panel + 1) as f64;
        for (node, weight) in GAUSS_8 {
            let shift = half * node;
            sum += weight * (function(middle - shift) + function(middle + shift));
        }
    }
    sum * half
}

#[cfg(test)]
mod tests {
    use super::integrate;

    #[test]
    fn degree_fifteen_is_exact_and_an_exponential_converges() {
        let monomial = integrate(0.0, 2.0, 1, |x| x.powi(15));
        assert!((monomial / (2.0_f64.powi(16) / 16.0) - 1.0).abs() < 1e-14);
        let exponential = integrate(0.0, 1.0, 1, f64::exp);
        assert!((exponential - (1.0_f64.exp() - 1.0)).abs() < 1e-14);
    }
}
