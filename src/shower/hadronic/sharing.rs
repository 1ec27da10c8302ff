//! How the energy of an interaction is shared out among mesons, and which mesons they are.
//!
//! Fractions of the energy come from the two-parameter stick-breaking law: the k-th meson takes a
//! share z of what is left, drawn from Beta(1 - d, t + k d). Energy is conserved, and the inclusive
//! spectrum is known exactly:
//!
//! dn/dx = G(1 + t) / (G(1 - d) G(t + d)) x^(-1-d) (1 - x)^(t + d - 1)
//!
//! (G the gamma function). The fragmentation region scales; the plateau dn/dlnx grows as x^-d, so
//! that the multiplicity grows as E^d, faster than the logarithm.
//!
//! # Source
//! The law of shares: Pitman & Yor 1997, Ann. Probab. 25, 855. Its parameters are chosen here to
//! give Gaisser's spectrum-weighted moments and the measured multiplicities (tests
//! `tests/validation/hadronic.rs`); the form itself is not from a published generator.

use rand_distr::{Beta, Distribution};

use crate::numerics::Stream;

use super::particle::Kind;

/// Discount d: growth of the plateau.
const DISCOUNT: f64 = 0.1;
/// Concentration t of mesons behind a leading nucleon.
pub const BEHIND_NUCLEON: f64 = 3.0;
/// Concentration t of all mesons of a meson's interaction.
pub const OF_MESON: f64 = 2.1;
/// Energy below which a share goes to the struck nucleus instead of a meson, GeV: the transverse
/// mass of a pion.
pub const LEAST_MESON_GEV: f64 = 0.37;

/// Shares out `left_gev`: the energies of mesons in the order they were taken (larger ones tend to
/// come first). Returns the energy that goes to the struck nucleus.
pub fn share_out(
    mut left_gev: f64,
    concentration: f64,
    stream: &mut Stream,
    energies: &mut Vec<f64>,
) -> f64 {
    let mut target = 0.0;
    let mut taken_so_far = 1.0;
    while left_gev > LEAST_MESON_GEV {
        let share = match Beta::new(1.0 - DISCOUNT, concentration + taken_so_far * DISCOUNT) {
            Ok(law) => law.sample(stream.generator()),
            // Both parameters are positive.
            Err(_) => return target + left_gev,
        };
        taken_so_far += 1.0;
        let taken = share * left_gev;
        left_gev -= taken;
        if taken > LEAST_MESON_GEV {
            energies.push(taken);
        } else {
            target += taken;
        }
    }
    target + left_gev
}

/// The inclusive density x dn/dx of [`share_out`], for checks.
pub fn inclusive(x: f64, concentration: f64) -> f64 {
    let (d, t) = (DISCOUNT, concentration);
    let norm = libm::lgamma(1.0 + t) - libm::lgamma(1.0 - d) - libm::lgamma(t + d);
    norm.exp() * x.powf(-d) * (1.0 - x).powf(t + d - 1.0)
}

/// The kind of a meson that carries a fraction x of a proton's energy.
///
/// Positive mesons lead more than negative ones, positive kaons more than pions; at small x the
/// three charges of the pion are even and kaons are a ninth. A twentieth of the kaons' quarks and
/// all baryon pairs are left out.
pub fn meson_of_proton(x: f64, stream: &mut Stream) -> Kind {
    let away = 1.0 - x;
    let positive_kaon = 0.035 + 0.11 * x;
    let negative_kaon = 0.035 * away * away;
    let neutral_kaon = 0.07 + 0.04 * x;
    let (neutral, eta) = (0.28, 0.03);
    let pions = 1.0 - positive_kaon - negative_kaon - neutral_kaon - neutral - eta;
    let positive = pions * (0.5 + 0.32 * x).min(1.0);
    pick(
        stream,
        [
            (Kind::PionPlus, positive),
            (Kind::PionMinus, pions - positive),
            (Kind::PionZero, neutral),
            (Kind::Eta, eta),
            (Kind::KaonPlus, positive_kaon),
            (Kind::KaonMinus, negative_kaon),
        ],
    )
}

/// The kind of a meson that carries a fraction x of a positive pion's energy.
///
/// The leading ones keep the pion's charge: the opposite charge falls as (1 - x)^4.
pub fn meson_of_pion(x: f64, stream: &mut Stream) -> Kind {
    let away = 1.0 - x;
    let opposite = 0.29 * away.powi(4);
    let neutral = 0.31 * away.powf(0.4);
    let eta = 0.03 * away;
    let kaons = 0.10 * away;
    pick(
        stream,
        [
            (Kind::PionPlus, 1.0 - opposite - neutral - eta - kaons),
            (Kind::PionMinus, opposite),
            (Kind::PionZero, neutral),
            (Kind::Eta, eta),
            (Kind::KaonPlus, 0.25 * kaons),
            (Kind::KaonMinus, 0.25 * kaons),
        ],
    )
}

/// A neutral kaon as it lives: half long, half short.
pub fn neutral_kaon(stream: &mut Stream) -> Kind {
    if stream.uniform() < 0.5 { Kind::KaonLong } else { Kind::KaonShort }
}

/// Picks by weight; what is left to one is a neutral kaon.
fn pick(stream: &mut Stream, weights: [(Kind, f64); 6]) -> Kind {
    let mut left = stream.uniform();
    for (kind, weight) in weights {
        left -= weight;
        if left < 0.0 {
            return kind;
        }
    }
    neutral_kaon(stream)
}
