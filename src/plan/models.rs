//! The published models a run used, and what is approximate.

use crate::rates::Spectrum;
use crate::report::{Approximation, Model};
use crate::study::Study;

use super::Weighted;

pub fn models(study: &Study, gamma: &Spectrum, backgrounds: &[Weighted]) -> Vec<Model> {
    let mut models = vec![
        ("air profile", air_profile(study)),
        ("refractive index of air", "Ciddor 1996, Appl. Opt. 35, 1566"),
        ("light yield and emission angle", "Frank & Tamm 1937, Dokl. Akad. Nauk SSSR 14, 107"),
        ("shower profile", "Gaisser & Hillas 1977, Proc. 15th ICRC 8, 353"),
        (
            "shower fluctuations; energies, angles, offsets and delays of emitters",
            "tables of this program's particle-by-particle cascade: bremsstrahlung and pair production Tsai 1974, Rev. Mod. Phys. 46, 815; Klein & Nishina 1929, Z. Phys. 52, 853; ionisation Berger & Seltzer 1964, NASA SP-3012; scattering Highland 1975, Nucl. Instrum. Methods 129, 497",
        ),
        (
            "pixel noise",
            "Campbell 1909, Proc. Camb. Phil. Soc. 15, 117; Panjer 1981, ASTIN Bull. 12, 22; Rice 1945, Bell Syst. Tech. J. 24, 46",
        ),
        ("accidental coincidences", "Eckart & Shonka 1938, Phys. Rev. 53, 752"),
        ("night-sky colour", "Benn & Ellison 1998, La Palma Technical Note 115"),
        ("order of layouts", "Efron 1979, Ann. Stat. 7, 1"),
    ];
    if study.air.molecular {
        models.push((
            "molecular scattering",
            "Bodhaine et al. 1999, J. Atmos. Oceanic Technol. 16, 1854",
        ));
    }
    if study.air.aerosol {
        models.push(("aerosol", "Angstrom 1929, Geogr. Ann. 11, 156"));
    }
    if !backgrounds.is_empty() {
        models.push((
            "hadronic interactions",
            "scaling generator held to the moments of Gaisser 1990, Cosmic Rays and Particle Physics; cross-sections after Aglietta et al. 2009, Phys. Rev. D 79, 032004",
        ));
    }
    let own = |purpose: String, citation: &str| Model { purpose, citation: citation.into() };
    let mut models: Vec<Model> =
        models.into_iter().map(|(purpose, citation)| own(purpose.into(), citation)).collect();
    models.push(own("gamma-ray spectrum".into(), &gamma.source));
    for weighted in backgrounds {
        let purpose = format!("{} spectrum", weighted.sample.species);
        models.push(own(purpose, &weighted.spectrum.source));
    }
    models
}

/// Where the study's air comes from.
fn air_profile(study: &Study) -> &'static str {
    let name = study.air.atmosphere.name();
    if name == "us1976" {
        "U.S. Standard Atmosphere 1976, NOAA/NASA/USAF"
    } else if name.starts_with("model:") {
        "NRLMSISE-00: Picone et al. 2002, J. Geophys. Res. 107(A12), 1468"
    } else if name.contains(['.', '/']) {
        "a table named in the study"
    } else {
        "Anderson et al. 1986, AFGL Atmospheric Constituent Profiles, AFGL-TR-86-0110"
    }
}

pub fn approximations(study: &Study) -> Vec<Approximation> {
    let rows = [
        (
            "Light of a shower is summed slab by slab from tables of emitters by age, made by the particle-by-particle cascade; 4,000 emitters an age.",
            "Sampling noise of the tables 2 to 4 % in density; agreement with the cascade itself: see the accuracy section of the README.",
        ),
        (
            "The magnetic field bends emitters by the linear response of their tables, for the direction of the pointing.",
            "Folding the pool in four sectors smooths its azimuth dependence; an excess of electrons over positrons, which shifts the pool by metres, is left out.",
        ),
        (
            "Hadronic interactions are drawn from scaling distributions of nucleons, pions, kaons and etas; baryon pairs, charm and nuclear fragments are left out; angles against the axis are small.",
            "Vertical muon spectra from 10 GeV to 1 TeV and the intensity above 1 GeV/c agree with published ones within 13 %; baryon pairs take 3 to 5 % of the energy (estimate).",
        ),
        (
            "The ranking's votes ignore the array's coincidence window and accidental triggers.",
            "Measured on the leading layouts: see the section event by event.",
        ),
        (
            "Noise is drawn in pixels with light and their neighbours.",
            "Groups of pure noise elsewhere are counted by the accidental rate only.",
        ),
        (
            "Cosmic-ray nuclei are superpositions of free nucleons; only the species named in the study are thrown.",
            "Helium adds about 40 % to a proton background at these thresholds (published fluxes).",
        ),
    ];
    let mut all: Vec<Approximation> = rows
        .into_iter()
        .map(|(what, size)| Approximation { what: what.into(), size: size.into() })
        .collect();
    if study.site.field_ut.is_none() {
        all.push(Approximation {
            what: "The study states no magnetic field: it is off.".into(),
            size: "40 uT across the axis take about a quarter of the light of a 100 GeV gamma at the shoulder of the pool and a tenth at 1 TeV (from memory).".into(),
        });
    }
    if study.pointing.zenith_deg > 60.0 {
        all.push(Approximation {
            what: "Zenith angles above 60 degrees.".into(),
            size: "Light spreads over kilometres and the small-angle tables are outside their tested range.".into(),
        });
    }
    all
}
