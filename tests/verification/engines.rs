//! The fast engine against the reference engine through the whole chain: images, rates, thresholds.

use std::path::Path;

use nightpool::plan::agree;
use nightpool::study::Study;

/// Gamma images above 50 photoelectrons: length and width within 10 %, size and centroid too; rates of
/// gamma rays within 5 % and of protons within 10 %; each with two standard errors of this reduced
/// run. Larger runs: `nightpool agree STUDY`.
#[test]
fn verify_fast_engine_against_the_cascade_in_images_and_rates() {
    let path = concat!(env!("CARGO_MANIFEST_DIR"), "/tests/cases/four_110m2_before.toml");
    let mut study = Study::read(Path::new(path)).unwrap();
    study.backgrounds.truncate(1);
    study.budget.impact_radius_m = Some(350.0);
    study.budget.gamma_energy_gev = [30.0, 2_000.0];
    study.budget.background_energy_gev = [60.0, 2_000.0];
    (study.budget.gamma_showers, study.budget.background_showers) = (300, 200);
    for row in agree(&study, &()).unwrap() {
        let ratio = row.ratio();
        println!("{} of {}: {:.3} +- {:.3}", row.quantity, row.of, ratio.value, ratio.error);
        let tolerance = match row.quantity.as_str() {
            "gamma rate (Hz)" => 0.05,
            "gamma threshold (GeV)" => continue,
            _ => 0.10,
        };
        let off = (ratio.value - 1.0).abs();
        assert!(off < tolerance + 2.0 * ratio.error, "{}: {ratio:?}", row.quantity);
    }
}
