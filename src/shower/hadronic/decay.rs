//! Decays: channels, and products carried from the rest frame to the flight frame.
//!
//! Two-body decays are isotropic in the rest frame; three-body decays fill phase space evenly
//! (form factors are left out); a muon's electron has the unpolarised spectrum x^2 (3 - 2x).
//!
//! # Source
//! Branching ratios: PDG (from memory). Rare channels are added to the nearest one listed.

use crate::consts::MUON_MASS_GEV;
use crate::numerics::Stream;

use super::particle::{Kind, Secondary};

type Four = [f64; 4];

/// Channels of a particle (of positive charge where there are two) with their shares.
fn channels(kind: Kind) -> &'static [(f64, &'static [Kind])] {
    use Kind::{
        Eta, KaonLong, KaonPlus, KaonShort, MuonMinus, MuonPlus, Neutrino, Photon, PionMinus,
        PionPlus, PionZero, Positron,
    };
    match kind {
        PionPlus => &[(1.0, &[MuonPlus, Neutrino])],
        PionZero => &[(1.0, &[Photon, Photon])],
        Eta => &[
            (0.394, &[Photon, Photon]),
            (0.327, &[PionZero, PionZero, PionZero]),
            (0.279, &[PionPlus, PionMinus, PionZero]),
        ],
        KaonPlus => &[
            (0.6356, &[MuonPlus, Neutrino]),
            (0.2067, &[PionPlus, PionZero]),
            (0.0558, &[PionPlus, PionPlus, PionMinus]),
            (0.0507, &[PionZero, Positron, Neutrino]),
            (0.0335, &[PionZero, MuonPlus, Neutrino]),
            (0.0177, &[PionPlus, PionZero, PionZero]),
        ],
        KaonShort => &[(0.692, &[PionPlus, PionMinus]), (0.308, &[PionZero, PionZero])],
        KaonLong => &[
            (0.2028, &[PionMinus, Positron, Neutrino]),
            (0.2028, &[PionPlus, Kind::Electron, Neutrino]),
            (0.1352, &[PionMinus, MuonPlus, Neutrino]),
            (0.1352, &[PionPlus, MuonMinus, Neutrino]),
            (0.1952, &[PionZero, PionZero, PionZero]),
            (0.1288, &[PionPlus, PionMinus, PionZero]),
        ],
        _ => &[],
    }
}

/// The products of a decay in flight of a particle of `energy_gev`, relative to its direction.
pub fn decay(kind: Kind, energy_gev: f64, stream: &mut Stream, products: &mut Vec<Secondary>) {
    products.clear();
    if kind.is_muon() {
        muon(kind, energy_gev, stream, products);
        return;
    }
    let negative = kind.charge() < 0;
    let listed = channels(if negative { kind.conjugate() } else { kind });
    let mut left = stream.uniform();
    let chosen = listed.iter().find(|(share, _)| {
        left -= share;
        left < 0.0
    });
    let Some((_, kinds)) = chosen.or(listed.last()) else { return };
    let mass = kind.mass_gev();
    let mut momenta = [[0.0; 4]; 3];
    match kinds.len() {
        2 => {
            let masses = [kinds[0].mass_gev(), kinds[1].mass_gev()];
            [momenta[0], momenta[1]] = two_body(mass, masses, stream);
        }
        _ => momenta = three_body(mass, [0, 1, 2].map(|i| kinds[i].mass_gev()), stream),
    }
    let gamma = energy_gev / mass;
    let along = (gamma * gamma - 1.0).max(0.0).sqrt();
    for (&product, four) in kinds.iter().zip(momenta) {
        let product = if negative { product.conjugate() } else { product };
        products.push(in_flight(product, four, gamma, along));
    }
}

fn muon(kind: Kind, energy_gev: f64, stream: &mut Stream, products: &mut Vec<Secondary>) {
    // x^2 (3 - 2x) is at most 1 on [0, 1].
    let x = loop {
        let x = stream.uniform();
        if stream.uniform() < x * x * (3.0 - 2.0 * x) {
            break x;
        }
    };
    let electron = if kind == Kind::MuonMinus { Kind::Electron } else { Kind::Positron };
    let energy = (0.5 * x * MUON_MASS_GEV).max(electron.mass_gev());
    let momentum = (energy * energy - electron.mass_gev().powi(2)).max(0.0).sqrt();
    let [x, y, z] = isotropic(stream).map(|c| c * momentum);
    let gamma = energy_gev / MUON_MASS_GEV;
    let along = (gamma * gamma - 1.0).max(0.0).sqrt();
    products.push(in_flight(electron, [energy, x, y, z], gamma, along));
    // The two neutrinos together.
    let neutrinos = [MUON_MASS_GEV - energy, -x, -y, -z];
    products.push(in_flight(Kind::Neutrino, neutrinos, gamma, along));
}

/// Lorentz boost along the direction of flight.
fn in_flight(kind: Kind, [e, x, y, z]: Four, gamma: f64, along: f64) -> Secondary {
    Secondary {
        kind,
        energy_gev: gamma * e + along * z,
        transverse_gev: [x, y],
        along_gev: gamma * z + along * e,
    }
}

fn isotropic(stream: &mut Stream) -> [f64; 3] {
    let cosine = 2.0 * stream.uniform() - 1.0;
    let sine = (1.0 - cosine * cosine).sqrt();
    let (cos, sin) = stream.direction();
    [sine * cos, sine * sin, cosine]
}

/// Momentum of two bodies of a system of mass `mass` at rest.
fn momentum_of(mass: f64, [a, b]: [f64; 2]) -> f64 {
    let product = (mass * mass - (a + b).powi(2)) * (mass * mass - (a - b).powi(2));
    product.max(0.0).sqrt() / (2.0 * mass)
}

fn two_body(mass: f64, masses: [f64; 2], stream: &mut Stream) -> [Four; 2] {
    let p = momentum_of(mass, masses);
    let [x, y, z] = isotropic(stream).map(|c| c * p);
    let energy = |m: f64| (p * p + m * m).sqrt();
    [[energy(masses[0]), x, y, z], [energy(masses[1]), -x, -y, -z]]
}

/// Phase space of three bodies: the mass of the last two by rejection with the product of the two
/// momenta as weight.
fn three_body(mass: f64, [a, b, c]: [f64; 3], stream: &mut Stream) -> [Four; 3] {
    let (least, most) = (b + c, mass - a);
    let bound = momentum_of(mass, [a, least]) * momentum_of(most, [b, c]);
    let pair = loop {
        let pair = least + (most - least) * stream.uniform();
        let weight = momentum_of(mass, [a, pair]) * momentum_of(pair, [b, c]);
        if stream.uniform() * bound < weight {
            break pair;
        }
    };
    let [first, system] = two_body(mass, [a, pair], stream);
    let [second, third] = two_body(pair, [b, c], stream);
    [first, boosted(second, system, pair), boosted(third, system, pair)]
}

/// A vector given in the rest frame of `system` (of mass `mass`), in the frame of `system`.
fn boosted(four: Four, system: Four, mass: f64) -> Four {
    let dot: f64 = (1..4).map(|i| four[i] * system[i]).sum();
    let energy = (four[0] * system[0] + dot) / mass;
    let factor = (four[0] + energy) / (system[0] + mass);
    [
        energy,
        four[1] + factor * system[1],
        four[2] + factor * system[2],
        four[3] + factor * system[3],
    ]
}
