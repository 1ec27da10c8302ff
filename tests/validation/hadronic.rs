//! The hadronic generator against published moments.

use nightpool::numerics::{Stage, Stream};
use nightpool::shower::hadronic::generator::{nucleon_interaction, pion_interaction};

/// Spectrum-weighted moments, mean of x^1.7 summed over particles of a kind, within 15 % of Gaisser
/// 1990, Cosmic Rays and Particle Physics (from memory): nucleons 0.263 + 0.035; neutral pions
/// 0.039; all mesons 0.046 + 0.033 + 0.039 and twice the charged kaons' 0.0090 + 0.0028, since this
/// generator counts kaons as pions. A pion's own charged pions: 0.25 to 0.30 (from memory).
#[test]
fn validate_z_factors_gaisser1990() {
    let (events, energy) = (40_000, 1_000.0);
    let mut stream = Stream::keyed(1, Stage::Shower, &[1]);
    let mut pions = Vec::new();
    let (mut nucleons, mut mesons, mut neutral, mut charged) = (0.0, 0.0, 0.0, 0.0);
    for _ in 0..events {
        pions.clear();
        let kept: f64 = nucleon_interaction(energy, &mut stream, &mut pions);
        nucleons += (kept / energy).powf(1.7);
        for pion in &pions {
            let moment = (pion.energy_gev / energy).powf(1.7);
            mesons += moment;
            neutral += if pion.neutral { moment } else { 0.0 };
        }
        pions.clear();
        pion_interaction(energy, &mut stream, &mut pions);
        let own = pions.iter().filter(|pion| !pion.neutral);
        charged += own.map(|pion| (pion.energy_gev / energy).powf(1.7)).sum::<f64>();
    }
    let rows = [
        ("nucleons", nucleons, 0.298),
        ("mesons", mesons, 0.118 + 2.0 * 0.0118),
        ("neutral pions", neutral, 0.039),
        ("charged pions of a pion", charged, 0.275),
    ];
    for (what, sum, published) in rows {
        let ours = sum / f64::from(events);
        println!("{what}: {ours:.4}, published {published}");
        assert!((ours / published - 1.0).abs() < 0.15, "{what}: {ours}, published {published}");
    }
}
