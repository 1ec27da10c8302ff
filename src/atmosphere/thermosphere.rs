//! The US Standard Atmosphere 1976 above 86 km: species by species in diffusive equilibrium.
//!
//! Nothing here matters to a shower (4e-6 of the air lies above 86 km); it is what the standard says.

use std::sync::LazyLock;

use super::standard::{GAS_CONSTANT, MOLAR_MASS, State, gravity_m_s2};
use crate::consts::AVOGADRO_PER_MOL;

/// Lowest and highest altitude of this part of the standard, m.
pub const SPAN_M: (f64, f64) = (86_000.0, 1_000_000.0);
/// Where the mean molar mass gives way to each gas's own, m.
const TURBOPAUSE_M: f64 = 100_000.0;
const RADIUS_KM: f64 = 6_356.766;
const STEP_M: f64 = 100.0;

/// One gas that diffuses through nitrogen: numbers of the standard's tables 6 and 7.
struct Gas {
    molar_mass: f64,
    /// Number density at 86 km, m^-3.
    base_m3: f64,
    /// Diffusion coefficient a (T / 273.15)^b / N: a in 1/(m s).
    diffusion: (f64, f64),
    thermal: f64,
    /// Q (km^-3), U (km), W (km^-3) of the flux term, and the same below 97 km.
    flux: [f64; 3],
    flux_below_97: [f64; 3],
}

const GASES: [Gas; 4] = [
    Gas {
        molar_mass: 15.999_4,
        base_m3: 8.6e16,
        diffusion: (6.986e20, 0.75),
        thermal: 0.0,
        flux: [-5.809_644e-4, 56.903_11, 2.706_240e-5],
        flux_below_97: [-3.416_248e-3, 97.0, 5.008_765e-4],
    },
    Gas {
        molar_mass: 31.998_8,
        base_m3: 3.030_898e19,
        diffusion: (4.863e20, 0.75),
        thermal: 0.0,
        flux: [1.366_212e-4, 86.0, 8.333_333e-5],
        flux_below_97: [0.0, 0.0, 0.0],
    },
    Gas {
        molar_mass: 39.948,
        base_m3: 1.351_400e18,
        diffusion: (4.487e20, 0.87),
        thermal: 0.0,
        flux: [9.434_079e-5, 86.0, 8.333_333e-5],
        flux_below_97: [0.0, 0.0, 0.0],
    },
    Gas {
        molar_mass: 4.002_6,
        base_m3: 7.581_7e14,
        diffusion: (1.7e21, 0.691),
        thermal: -0.4,
        flux: [-2.457_369e-4, 86.0, 6.666_667e-4],
        flux_below_97: [0.0, 0.0, 0.0],
    },
];

const NITROGEN_MOLAR_MASS: f64 = 28.013_4;
const NITROGEN_BASE_M3: f64 = 1.129_794e20;
const HYDROGEN_MOLAR_MASS: f64 = 1.007_97;
/// Atomic hydrogen at 500 km, m^-3; its upward flux, 1/(m2 s); its diffusion; its thermal term.
const HYDROGEN_500_M3: f64 = 8.0e10;
const HYDROGEN_FLUX: f64 = 7.2e11;
const HYDROGEN_DIFFUSION: (f64, f64) = (3.305e21, 0.5);
const HYDROGEN_THERMAL: f64 = -0.25;

/// Kinetic temperature, K, and its slope, K/m.
///
/// 186.8673 K to 91 km; an ellipse 263.1905 - 76.3232 (1 - ((z - 91) / 19.9429)^2)^1/2 to 110 km;
/// 240 + 12 (z - 110) to 120 km; 1000 - 640 exp(-0.01875 (z - 120) (R + 120) / (R + z)) above.
///
/// # Source
/// U.S. Standard Atmosphere 1976, equations 25, 27, 29, 31 (constants from memory).
pub fn temperature_k(altitude_m: f64) -> (f64, f64) {
    let z = 1e-3 * altitude_m;
    if z <= 91.0 {
        (186.867_3, 0.0)
    } else if z <= 110.0 {
        let x = (z - 91.0) / 19.942_9;
        let root = (1.0 - x * x).sqrt();
        (263.190_5 - 76.323_2 * root, 1e-3 * 76.323_2 * x / (19.942_9 * root))
    } else if z <= 120.0 {
        (240.0 + 12.0 * (z - 110.0), 12e-3)
    } else {
        let ratio = (RADIUS_KM + 120.0) / (RADIUS_KM + z);
        let fall = 640.0 * (-0.018_75 * (z - 120.0) * ratio).exp();
        (1_000.0 - fall, 1e-3 * fall * 0.018_75 * ratio * ratio)
    }
}

/// The air at one altitude between 86 and 1000 km.
///
/// # Source
/// U.S. Standard Atmosphere 1976, section 1.3 and equations 32 to 40, tables 6 and 7 (constants from
/// memory). Within 0.05 % of the published table in pressure and density to 500 km, 0.1 % to 1000 km, test
/// `validate_air_us1976_above_86_km`.
pub fn state(altitude_m: f64) -> State {
    let place = (altitude_m.clamp(SPAN_M.0, SPAN_M.1) - SPAN_M.0) / STEP_M;
    let low = (place as usize).min(TABLE.len() - 2);
    let share = place - low as f64;
    let mix = |index: usize| {
        let (a, b) = (TABLE[low][index], TABLE[low + 1][index]);
        (a + share * (b - a)).exp()
    };
    let temperature_k = temperature_k(altitude_m).0;
    State {
        temperature_k,
        pressure_pa: mix(0) * GAS_CONSTANT * 1e-3 / AVOGADRO_PER_MOL * temperature_k,
        density_kg_m3: mix(1),
    }
}

/// Logarithms of number density (m^-3) and mass density (kg/m3) every [`STEP_M`].
static TABLE: LazyLock<Vec<[f64; 2]>> = LazyLock::new(table);

/// Integrates every gas upward by the trapezoidal rule.
fn table() -> Vec<[f64; 2]> {
    let count = ((SPAN_M.1 - SPAN_M.0) / STEP_M) as usize + 1;
    let altitude = |index: usize| SPAN_M.0 + STEP_M * index as f64;
    let base_k = temperature_k(SPAN_M.0).0;
    let mut nitrogen = 0.0;
    let mut exponents = [0.0; 4];
    let mut rows = Vec::with_capacity(count);
    let mut rates = None::<(f64, [f64; 4])>;
    for index in 0..count {
        let z = altitude(index);
        let temperature = temperature_k(z).0;
        let warm = base_k / temperature;
        let nitrogen_now = |exponent: f64| NITROGEN_BASE_M3 * warm * f64::exp(-exponent);
        let nitrogen_rate = nitrogen_rate(z);
        if let Some((before, _)) = rates {
            nitrogen += 0.5 * STEP_M * (before + nitrogen_rate);
        }
        let n2 = nitrogen_now(nitrogen);
        // Oxygen diffuses through nitrogen, argon and helium through both oxygens as well.
        let o = |exponents: &[f64; 4], gas: usize| {
            GASES[gas].base_m3 * warm * f64::exp(-exponents[gas])
        };
        let mut now = [0.0; 4];
        for (gas, known) in GASES.iter().enumerate() {
            let through = if gas < 2 { n2 } else { n2 + o(&exponents, 0) + o(&exponents, 1) };
            now[gas] = gas_rate(known, z, through);
            if let Some((_, before)) = rates {
                exponents[gas] += 0.5 * STEP_M * (before[gas] + now[gas]);
            }
        }
        rates = Some((nitrogen_rate, now));
        let mut number = n2;
        let mut mass = n2 * NITROGEN_MOLAR_MASS;
        for (gas, known) in GASES.iter().enumerate() {
            number += o(&exponents, gas);
            mass += o(&exponents, gas) * known.molar_mass;
        }
        rows.push([number, mass]);
    }
    add_hydrogen(&mut rows);
    rows.iter().map(|[n, m]| [n.ln(), (m * 1e-3 / AVOGADRO_PER_MOL).ln()]).collect()
}

/// M g / (R T) of nitrogen: of the mean air below the turbopause.
fn nitrogen_rate(altitude_m: f64) -> f64 {
    let molar = if altitude_m <= TURBOPAUSE_M { MOLAR_MASS } else { NITROGEN_MOLAR_MASS };
    molar * gravity_m_s2(altitude_m) / (GAS_CONSTANT * temperature_k(altitude_m).0)
}

/// Eddy diffusion, m2/s.
fn eddy_m2_s(altitude_m: f64) -> f64 {
    let z = 1e-3 * altitude_m;
    if z < 95.0 {
        120.0
    } else if z < 115.0 {
        120.0 * (1.0 - 400.0 / (400.0 - (z - 95.0).powi(2))).exp()
    } else {
        0.0
    }
}

/// What a gas's logarithm of number density times temperature loses a metre.
fn gas_rate(gas: &Gas, altitude_m: f64, through_m3: f64) -> f64 {
    let (temperature, slope) = temperature_k(altitude_m);
    let gravity = gravity_m_s2(altitude_m);
    let (a, b) = gas.diffusion;
    let diffusion = a * (temperature / 273.15).powf(b) / through_m3;
    let eddy = eddy_m2_s(altitude_m);
    let mean = if altitude_m <= TURBOPAUSE_M { MOLAR_MASS } else { NITROGEN_MOLAR_MASS };
    let weight =
        gas.molar_mass + mean * eddy / diffusion + gas.thermal * GAS_CONSTANT * slope / gravity;
    let settling = gravity / (GAS_CONSTANT * temperature) * diffusion / (diffusion + eddy) * weight;
    let z = 1e-3 * altitude_m;
    let term = |[q, _, w]: [f64; 3], x: f64| q * x * x * (-w * x * x * x).exp();
    let mut flux = term(gas.flux, z - gas.flux[1]);
    if z < 97.0 {
        flux += term(gas.flux_below_97, gas.flux_below_97[1] - z);
    }
    settling + 1e-3 * flux
}

/// Atomic hydrogen, which the standard gives above 150 km only.
fn add_hydrogen(rows: &mut [[f64; 2]]) {
    let altitude = |index: usize| SPAN_M.0 + STEP_M * index as f64;
    let place = |z: f64| ((z - SPAN_M.0) / STEP_M) as usize;
    let (start, middle) = (place(150_000.0), place(500_000.0));
    let temperature_500 = temperature_k(500_000.0).0;
    let rate = |z: f64| HYDROGEN_MOLAR_MASS * gravity_m_s2(z) / (GAS_CONSTANT * temperature_k(z).0);
    let warm = |z: f64| (temperature_500 / temperature_k(z).0).powf(1.0 + HYDROGEN_THERMAL);
    let step = |from: f64, to: f64| 0.5 * (to - from) * (rate(from) + rate(to));
    let mut put = |index: usize, number: f64| {
        rows[index][0] += number;
        rows[index][1] += number * HYDROGEN_MOLAR_MASS;
    };
    let mut tau = 0.0;
    for index in middle..=place(SPAN_M.1) {
        if index > middle {
            tau += step(altitude(index - 1), altitude(index));
        }
        put(index, HYDROGEN_500_M3 * warm(altitude(index)) * f64::exp(-tau));
    }
    // Downward from 500 km: the flux through the other gases adds to what settling leaves.
    let (mut tau, mut lifted) = (0.0, 0.0);
    let others: Vec<f64> = rows.iter().map(|row| row[0]).collect();
    let drag = |index: usize, tau: f64| {
        let z = altitude(index);
        let (a, b) = HYDROGEN_DIFFUSION;
        let diffusion = a * (temperature_k(z).0 / 273.15).powf(b) / others[index];
        HYDROGEN_FLUX / diffusion / warm(z) * f64::exp(tau)
    };
    let mut before = drag(middle, 0.0);
    for index in (start..middle).rev() {
        tau -= step(altitude(index), altitude(index + 1));
        let now = drag(index, tau);
        lifted += 0.5 * STEP_M * (now + before);
        before = now;
        let number = (HYDROGEN_500_M3 + lifted) * warm(altitude(index)) * f64::exp(-tau);
        rows[index][0] += number;
        rows[index][1] += number * HYDROGEN_MOLAR_MASS;
    }
}
