//! The hadronic generator and its transport against conservation.

use nightpool::numerics::{Stage, Stream};
use nightpool::shower::Species;
use nightpool::shower::hadronic::decay::decay;
use nightpool::shower::hadronic::sharing::{BEHIND_NUCLEON, OF_MESON, inclusive, share_out};
use nightpool::shower::hadronic::{Axis, Floors, Interaction, Kind, core};

const KINDS: [Kind; 8] = [
    Kind::Proton,
    Kind::Neutron,
    Kind::PionPlus,
    Kind::PionMinus,
    Kind::KaonPlus,
    Kind::KaonMinus,
    Kind::KaonLong,
    Kind::KaonShort,
];

/// Energy and charge in are energy and charge out, event by event, for every projectile.
#[test]
fn verify_energy_and_charge_of_every_interaction() {
    let mut stream = Stream::keyed(1, Stage::Shower, &[2]);
    let mut event = Interaction::default();
    for kind in KINDS {
        for step in 0..2_000 {
            let energy = 2.0 * 1.0055_f64.powi(step);
            event.draw(kind, energy, &mut stream);
            let made: f64 = event.secondaries.iter().map(|particle| particle.energy_gev).sum();
            let balance = (made + event.target_gev) / energy - 1.0;
            assert!(balance.abs() < 1e-9, "{kind:?} {energy} GeV: {balance}");
            let out: i32 = event.secondaries.iter().map(|particle| particle.kind.charge()).sum();
            let [before, after] = event.target_charge;
            assert_eq!(kind.charge() + before, out + after, "{kind:?} {energy} GeV");
            for particle in &event.secondaries {
                let [x, y] = particle.transverse_gev;
                let momentum2 = x * x + y * y + particle.along_gev.powi(2);
                let mass2 = particle.energy_gev.powi(2) - momentum2;
                let error = (mass2 - particle.kind.mass_gev().powi(2)).abs();
                assert!(error < 1e-9 * particle.energy_gev.powi(2), "{particle:?}");
            }
        }
    }
}

/// Every decay conserves energy, momentum and charge, in the rest frame and in flight.
#[test]
fn verify_decays_conserve_everything() {
    let mut stream = Stream::keyed(1, Stage::Shower, &[3]);
    let mut products = Vec::new();
    let decaying = [Kind::PionZero, Kind::Eta, Kind::MuonPlus, Kind::MuonMinus];
    for kind in KINDS[2..].iter().copied().chain(decaying) {
        for energy in [1.000_001 * kind.mass_gev(), 3.0, 5e3] {
            for _ in 0..300 {
                decay(kind, energy, &mut stream, &mut products);
                let sum = |of: &dyn Fn(usize) -> f64| (0..products.len()).map(of).sum::<f64>();
                let momentum = (energy * energy - kind.mass_gev().powi(2)).sqrt();
                let along = sum(&|i| products[i].along_gev);
                assert!((sum(&|i| products[i].energy_gev) / energy - 1.0).abs() < 1e-9, "{kind:?}");
                assert!((along - momentum).abs() < 1e-9 * energy, "{kind:?} {energy}: {along}");
                for axis in 0..2 {
                    assert!(sum(&|i| products[i].transverse_gev[axis]).abs() < 1e-9 * energy);
                }
                let charge: i32 = products.iter().map(|particle| particle.kind.charge()).sum();
                assert_eq!(charge, kind.charge(), "{kind:?}");
            }
        }
    }
}

/// The shares of the stick-breaking law follow its exact inclusive density.
#[test]
fn verify_shares_follow_their_inclusive_density() {
    let mut stream = Stream::keyed(1, Stage::Shower, &[4]);
    for concentration in [BEHIND_NUCLEON, OF_MESON] {
        let (events, energy) = (40_000, 1e4);
        let edges: [f64; 6] = [1e-3, 1e-2, 0.05, 0.2, 0.5, 1.0];
        let mut counts = [0.0; 5];
        let mut energies = Vec::new();
        for _ in 0..events {
            energies.clear();
            share_out(energy, concentration, &mut stream, &mut energies);
            for x in energies.iter().map(|taken| taken / energy) {
                if let Some(bin) = (0..5).find(|&bin| (edges[bin]..edges[bin + 1]).contains(&x)) {
                    counts[bin] += 1.0;
                }
            }
        }
        for bin in 0..5 {
            // Midpoints in ln x, and in ln(1 - x) for the last bin.
            let steps = 4_000;
            let exact: f64 = (0..steps)
                .map(|step| {
                    let share = (f64::from(step) + 0.5) / f64::from(steps);
                    let x = edges[bin] * (edges[bin + 1] / edges[bin]).powf(share);
                    inclusive(x, concentration) * (edges[bin + 1] / edges[bin]).ln()
                        / f64::from(steps)
                })
                .sum();
            let expected = exact * f64::from(events);
            // Four standard errors of a sum of nearly independent counts.
            let error = 4.0 * expected.sqrt();
            assert!((counts[bin] - expected).abs() < error, "{bin}: {} {expected}", counts[bin]);
        }
    }
}

/// Energy of a primary is found again in photons, muons, neutrinos, air, ground and what is
/// dropped; photons are thinned without bias.
#[test]
fn verify_energy_of_a_whole_core() {
    // An exponential air of 8 km over sea level.
    let axis = Axis {
        ground_g_cm2: 1_000.0,
        distance_m: &|depth| 8e3 * (1_000.0 / depth).ln(),
        depth_g_cm2: &|distance| 1_000.0 * (-distance / 8e3).exp(),
        bend_ut: [10.0, -25.0],
    };
    let all = Floors { thinning: 0.0, ..Floors::default() };
    for (index, species) in [Species::Proton, Species::HELIUM].into_iter().enumerate() {
        for energy in [5.0, 100.0, 3e3] {
            let key = [index as u64, energy as u64];
            let mut stream = Stream::keyed(1, Stage::Shower, &key);
            let exact = core(species, energy, &axis, all, &mut stream);
            assert!((exact.energy_gev() / energy - 1.0).abs() < 1e-9, "{}", exact.energy_gev());
        }
    }
    let (energy, showers) = (1e3, 400);
    let mean: f64 = (0..showers)
        .map(|shower| {
            let mut stream = Stream::keyed(2, Stage::Shower, &[shower]);
            core(Species::Proton, energy, &axis, Floors::default(), &mut stream).energy_gev()
        })
        .sum::<f64>()
        / showers as f64;
    // Thinned photons of 0.5 GeV at most: a few hundred a shower, error of the mean below 0.2 %.
    assert!((mean / energy - 1.0).abs() < 0.005, "{mean}");
}
