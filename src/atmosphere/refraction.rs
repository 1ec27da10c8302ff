//! Refractive index of air by wavelength, temperature, pressure, humidity and carbon dioxide.
//!
//! The index is a sum of two terms that each factor into a density and a dispersion (Ciddor 1996,
//! equation 5): n - 1 = (rho_a / rho_axs) (n_axs - 1) + (rho_v / rho_vs) (n_vs - 1). An atmosphere
//! therefore stores two densities by altitude and is exact at every wavelength.

/// Wavelengths for which the dispersion is published, nm. Water vapour was measured from 350 to
/// 1200 nm; below, its term (at most 1e-6 in n) is an extrapolation.
pub const VALID_NM: (f64, f64) = (230.0, 1_690.0);

/// Carbon dioxide of the standard profiles, parts per million by volume.
pub const STANDARD_CO2_PPM: f64 = 450.0;

const DISPERSION: [(f64, f64); 2] = [(5_792_105.0, 238.018_5), (167_917.0, 57.362)];
const VAPOUR: [f64; 4] = [295.235, 2.642_2, -0.032_380, 0.004_028];
const VAPOUR_SCALE: f64 = 1.022e-8;

/// Square of the wavenumber, um^-2.
#[inline]
fn wavenumber2(wavelength_nm: f64) -> f64 {
    let s = 1e3 / wavelength_nm;
    s * s
}

/// Dispersion of standard dry air (15 C, 101,325 Pa), n - 1:
/// 1e-8 [k1 / (k0 - s^2) + k3 / (k2 - s^2)] [1 + 0.534e-6 (CO2 - 450)], s = 1 / wavelength in um.
///
/// # Source
/// Ciddor 1996, Appl. Opt. 35, 1566, equations 1 and 2.
#[inline]
pub fn standard_refractivity(wavelength_nm: f64, co2_ppm: f64) -> f64 {
    let s2 = wavenumber2(wavelength_nm);
    let [(a, p), (b, q)] = DISPERSION;
    1e-8 * (a / (p - s2) + b / (q - s2)) * (1.0 + 0.534e-6 * (co2_ppm - 450.0))
}

/// The same for the group index: (n - 1) + s dn/ds.
#[inline]
pub fn standard_group_refractivity(wavelength_nm: f64, co2_ppm: f64) -> f64 {
    let s2 = wavenumber2(wavelength_nm);
    let sum: f64 =
        DISPERSION.iter().map(|(height, pole)| height * (pole + s2) / (pole - s2).powi(2)).sum();
    1e-8 * sum * (1.0 + 0.534e-6 * (co2_ppm - 450.0))
}

/// Dispersion of standard water vapour (20 C, 1,333 Pa), n - 1:
/// 1.022e-8 (w0 + w1 s^2 + w2 s^4 + w3 s^6).
///
/// # Source
/// Ciddor 1996, Appl. Opt. 35, 1566, equation 3.
#[inline]
pub fn vapour_refractivity(wavelength_nm: f64) -> f64 {
    let s2 = wavenumber2(wavelength_nm);
    let [w0, w1, w2, w3] = VAPOUR;
    VAPOUR_SCALE * (w0 + s2 * (w1 + s2 * (w2 + s2 * w3)))
}

/// The same for the group index.
#[inline]
pub fn vapour_group_refractivity(wavelength_nm: f64) -> f64 {
    let s2 = wavenumber2(wavelength_nm);
    let [w0, w1, w2, w3] = VAPOUR;
    VAPOUR_SCALE * (w0 + s2 * (3.0 * w1 + s2 * (5.0 * w2 + s2 * 7.0 * w3)))
}

/// Densities of dry air and of water vapour over those of their standard states, as the index
/// counts them: x p / (Z T) over its standard value.
pub fn density_ratios(temperature_k: f64, pressure_pa: f64, vapour_fraction: f64) -> (f64, f64) {
    let compression = compressibility(temperature_k, pressure_pa, vapour_fraction);
    let moles = pressure_pa / (compression * temperature_k);
    let standard = 101_325.0 / (compressibility(288.15, 101_325.0, 0.0) * 288.15);
    let saturated = 1_333.0 / (compressibility(293.15, 1_333.0, 1.0) * 293.15);
    ((1.0 - vapour_fraction) * moles / standard, vapour_fraction * moles / saturated)
}

/// n - 1 of moist air.
///
/// The molar fraction of water is vapour pressure over pressure: `vapour_pa` is the partial pressure
/// that the water has in the air. Worked values that start from a saturation pressure over pure
/// water leave out the enhancement factor and lie up to 1.5e-8 apart; [`vapour_fraction`] puts it in.
///
/// # Units
/// Wavelength nm, temperature K, pressures Pa, carbon dioxide parts per million.
///
/// # Source
/// Ciddor 1996, Appl. Opt. 35, 1566, equations 1 to 5, 12 and appendices (coefficients from memory;
/// they reproduce the published worked values). Tests `validate_refractivity_ciddor1996`,
/// `validate_refractivity_reference_library`.
pub fn refractivity(
    wavelength_nm: f64,
    temperature_k: f64,
    pressure_pa: f64,
    vapour_pa: f64,
    co2_ppm: f64,
) -> f64 {
    let (dry, vapour) = density_ratios(temperature_k, pressure_pa, vapour_pa / pressure_pa);
    dry * standard_refractivity(wavelength_nm, co2_ppm)
        + vapour * vapour_refractivity(wavelength_nm)
}

/// Group refractivity n_g - 1 of moist air: n - 1 less wavelength times its slope.
pub fn group_refractivity(
    wavelength_nm: f64,
    temperature_k: f64,
    pressure_pa: f64,
    vapour_pa: f64,
    co2_ppm: f64,
) -> f64 {
    let (dry, vapour) = density_ratios(temperature_k, pressure_pa, vapour_pa / pressure_pa);
    dry * standard_group_refractivity(wavelength_nm, co2_ppm)
        + vapour * vapour_group_refractivity(wavelength_nm)
}

/// Saturation vapour pressure over liquid water, Pa: exp(A T^2 + B T + C + D / T).
///
/// # Validity
/// -100 to 100 C; below 0 C over supercooled water, the convention of radiosondes.
///
/// # Source
/// Davis 1992, Metrologia 29, 67 (CIPM-81/91), as used by Ciddor 1996, appendix C.
pub fn saturation_vapour_pa(temperature_k: f64) -> f64 {
    let t = temperature_k;
    (1.237_884_7e-5 * t * t - 1.912_131_6e-2 * t + 33.937_110_47 - 6.343_164_5e3 / t).exp()
}

/// Molar fraction of water vapour at a relative humidity between 0 and 1, with the enhancement
/// factor f = 1.00062 + 3.14e-8 p + 5.6e-7 t^2.
///
/// # Source
/// Ciddor 1996, appendix C (Davis 1992).
pub fn vapour_fraction(temperature_k: f64, pressure_pa: f64, relative_humidity: f64) -> f64 {
    let t = temperature_k - 273.15;
    let enhancement = 1.000_62 + 3.14e-8 * pressure_pa + 5.6e-7 * t * t;
    relative_humidity * enhancement * saturation_vapour_pa(temperature_k) / pressure_pa
}

/// Compressibility of moist air.
///
/// # Source
/// Davis 1992, Metrologia 29, 67 (CIPM-81/91), as used by Ciddor 1996.
fn compressibility(temperature_k: f64, pressure_pa: f64, vapour_fraction: f64) -> f64 {
    let t = temperature_k - 273.15;
    let ratio = pressure_pa / temperature_k;
    let x = vapour_fraction;
    let first = 1.581_23e-6 - 2.933_1e-8 * t
        + 1.104_3e-10 * t * t
        + (5.707e-6 - 2.051e-8 * t) * x
        + (1.989_8e-4 - 2.376e-6 * t) * x * x;
    1.0 - ratio * first + ratio * ratio * (1.83e-11 - 0.765e-8 * x * x)
}
