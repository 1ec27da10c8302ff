//! Spectra against numbers printed by others.

use nightpool::rates::{Spectrum, vertical_cutoff_gv};

fn spectrum(name: &str) -> Spectrum {
    Spectrum::named(name).unwrap()
}

/// Integral fluxes of the Crab fits, cm^-2 s^-1: computed apart from this program from the same
/// published coefficients (adaptive quadrature in Python), to the three digits given.
#[test]
fn validate_crab_integral_fluxes_of_published_fits() {
    let table = [
        (100.0, [7.28e-10, 6.50e-10, 4.76e-10]),
        (300.0, [1.23e-10, 1.36e-10, 1.20e-10]),
        (500.0, [5.37e-11, 6.45e-11, 5.84e-11]),
        (1_000.0, [1.75e-11, 2.27e-11, 2.03e-11]),
    ];
    let names = ["crab-hegra-2004", "crab-hess-2006", "crab-magic-2015"];
    for (above, expected) in table {
        for (name, expected) in names.iter().zip(expected) {
            let found = 1e-4 * spectrum(name).integral_m2_s(above, 1e8);
            let step = 0.5 / 100.0;
            assert!((found / expected - 1.0).abs() < step, "{name} > {above} GeV: {found:e}");
        }
    }
}

/// HEGRA 2003 (abstract of astro-ph/0209447): integral above 350 GeV (8.1 +-0.1 +-0.2) x 1e-11
/// cm^-2 s^-1, by another set of telescopes and another mode than the fits.
#[test]
fn validate_crab_flux_above_350_gev_lucarelli2003() {
    for (name, band) in [("crab-hegra-2004", 0.25), ("crab-magic-2015", 0.25)] {
        let found = 1e-4 * spectrum(name).integral_m2_s(350.0, 1e8);
        // Absolute fluxes of the experiments agree to their energy scales, +-15 %: 25 % in flux.
        assert!((found / 8.1e-11 - 1.0).abs() < band, "{name}: {found:e}");
    }
}

/// E^2.7 dN/dE of the three-population model of Gaisser 2012 (fit with a mixed third population),
/// m^-2 s^-1 sr^-1 GeV^1.7, coded apart from this program from the published parameters: protons
/// and all particles at 0.1, 1, 10, 100 and 1000 TeV.
#[test]
fn validate_cosmic_ray_groups_gaisser2012() {
    let table = [
        (1e2, 9_536.0, 23_570.0),
        (1e3, 10_530.0, 27_950.0),
        (1e4, 11_680.0, 33_530.0),
        (1e5, 12_830.0, 40_520.0),
        (1e6, 11_970.0, 45_700.0),
    ];
    let names = ["proton-gaisser-2012", "helium-gaisser-2012", "nitrogen", "silicon", "iron"];
    for (energy, proton, all) in table {
        let scaled = |name: &str| spectrum(name).flux_m2_s_gev(energy) * f64::powf(energy, 2.7);
        assert!((scaled("proton-gaisser-2012") / proton - 1.0).abs() < 1e-3);
        assert!((scaled("all-particle-gaisser-2012") / all - 1.0).abs() < 1e-3);
        let sum: f64 = names.iter().map(|name| scaled(name)).sum();
        assert!((sum / all - 1.0).abs() < 1e-3, "{energy}: {sum}");
    }
}

/// All nucleons, PDG review of cosmic rays (from memory): 1.430e-4 m^-2 s^-1 sr^-1 GeV^-1 at 1 TeV,
/// 8.41e-2 m^-2 s^-1 sr^-1 above.
#[test]
fn validate_all_nucleon_flux_pdg2022() {
    let nucleons = spectrum("all-nucleon");
    assert!((nucleons.flux_m2_s_gev(1e3) / 1.430e-4 - 1.0).abs() < 5e-4);
    assert!((nucleons.integral_m2_s(1e3, 1e12) / 8.41e-2 - 1.0).abs() < 1e-3);
}

/// Protons at 1 TeV, m^-2 s^-1 sr^-1 TeV^-1, each at what its source says: 0.096 +-0.005 (average of
/// direct measurements), 0.11 +-0.05 (HEGRA 1999), 0.11 (Fegan 2004), 0.0764 (AMS 2015, from its form
/// by hand: 454.4 (1/0.045)^-2.849 [1 + (1/0.336)^5.54]^0.024), 0.0836 (Gaisser 2012, from the check
/// value 10,530 / 1000^2.7 per GeV). All but the last two from memory. They differ by 40 %, which is
/// the uncertainty of a background rate here.
#[test]
fn validate_proton_flux_at_1_tev_of_five_sources() {
    for (name, expected, uncertainty) in [
        ("proton-average", 0.096, 0.005),
        ("proton-hegra-1999", 0.11, 0.05),
        ("proton-fegan-2004", 0.11, 0.001),
        ("proton-ams-2015", 0.0764, 0.0002),
        ("proton-gaisser-2012", 0.0836, 0.0001),
    ] {
        let flux = spectrum(name).flux_m2_s_tev(1e3);
        assert!((flux - expected).abs() <= uncertainty, "{name}: {flux}");
    }
}

/// AMS 2015 in rigidity (parameters from memory): at 45 GV, where the break is still weak, the flux
/// is 0.4544 per GV times the break's value there, (1 + (45/336)^5.54)^0.024 = 1 + 3.5e-7; helium's
/// is (1 + (45/245)^4.41)^0.027 = 1 + 1.5e-5.
#[test]
fn validate_proton_flux_at_45_gv_ams2015() {
    let energy = 45.0_f64.hypot(0.938_272);
    let per_gv = spectrum("proton-ams-2015").flux_m2_s_gev(energy) * 45.0 / energy;
    assert!((per_gv / 0.4544 - 1.0).abs() < 1e-6, "{per_gv}");
    // Helium: two charges and four nucleons at the same rigidity.
    let energy = 90.0_f64.hypot(3.727);
    let per_gv = spectrum("helium-ams-2015").flux_m2_s_gev(energy) * 4.0 * 45.0 / energy;
    assert!((per_gv / 0.0948 - 1.000_015).abs() < 1e-6, "{per_gv}");
}

/// Electrons and positrons: the two published forms agree within 30 % where both were measured, and
/// the break at 0.914 TeV steepens the index from 3.09 to 3.92 (Ambrosi et al. 2017, from memory).
#[test]
fn validate_electron_flux_ambrosi2017() {
    let (old, new) = (spectrum("electron"), spectrum("electron-dampe-2017"));
    for energy in [100.0, 300.0, 1_000.0] {
        let ratio = old.flux_m2_s_tev(energy) / new.flux_m2_s_tev(energy);
        assert!((ratio - 1.0).abs() < 0.3, "{energy}: {ratio}");
    }
    assert!((new.flux_m2_s_gev(100.0) / 1.6e-4 - 1.0).abs() < 0.02);
    let slope = |energy: f64| {
        let step = 1.001_f64;
        -(new.flux_m2_s_tev(energy * step) / new.flux_m2_s_tev(energy)).ln() / step.ln()
    };
    assert!((slope(50.0) - 3.09).abs() < 0.01);
    assert!((slope(20_000.0) - 3.92).abs() < 0.01);
    assert!(new.covers(100.0) && !new.covers(10_000.0));
}

/// Vertical cut-off at La Palma: 11 to 12 GV (from memory, +-10 %), for the dipole latitude of its
/// inclination, 37.2 degrees (IGRF-14 for 2025).
#[test]
fn validate_vertical_cutoff_stoermer1955() {
    let latitude = (0.5 * 37.2_f64.to_radians().tan()).atan();
    let found = vertical_cutoff_gv(latitude);
    assert!((11.0..=12.0).contains(&found), "{found}");
}

#[test]
fn validate_every_named_spectrum_has_a_source_and_falls() {
    for name in Spectrum::names() {
        let found = spectrum(name);
        assert!(!found.source.is_empty() && found.source.contains(char::is_numeric), "{name}");
        let (low, high) = found.range_tev;
        assert!(low > 0.0 && high > low, "{name}");
        let mut last = f64::INFINITY;
        for step in 0..=40 {
            let energy = 1e3 * low.max(0.02) * (high / low.max(0.02)).powf(f64::from(step) / 40.0);
            let flux = found.flux_m2_s_tev(energy);
            assert!(flux > 0.0 && flux < last, "{name} at {energy} GeV");
            last = flux;
        }
    }
    assert!(Spectrum::named("nothing").is_err());
}
