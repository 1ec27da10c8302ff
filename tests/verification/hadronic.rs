//! The hadronic generator against conservation.

use nightpool::numerics::{Stage, Stream};
use nightpool::shower::hadronic::generator::nucleon_interaction;

/// The leading nucleon and the pions carry the energy of the interaction, event by event, but for a
/// last piece too soft to be a pion.
#[test]
fn verify_energy_of_an_interaction() {
    let mut stream = Stream::keyed(1, Stage::Shower, &[2]);
    let mut pions = Vec::new();
    for step in 0..2_000 {
        let energy = 2.0 * 1.005_f64.powi(step);
        pions.clear();
        let kept = nucleon_interaction(energy, &mut stream, &mut pions);
        let made: f64 = pions.iter().map(|pion| pion.energy_gev).sum();
        let missing = energy - kept - made;
        assert!((-1e-9 * energy..0.14).contains(&missing), "{energy} GeV: {missing} GeV missing");
    }
}
