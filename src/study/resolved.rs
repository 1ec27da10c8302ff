//! The study, resolved: every default filled in, every number in range, units in the names.

use std::path::PathBuf;

use crate::atmosphere::Atmosphere;
use crate::layout::geodetic::Geodetic;
use crate::layout::{Constraints, Tariff};
use crate::scan::QuietRule;
use crate::shower::Species;
use crate::telescope::{NightSky, TelescopeKind};

/// A whole study.
#[derive(Clone, Debug)]
pub struct Study {
    /// Short name, also the default name of the report's folder.
    pub name: String,
    /// One line for the reader.
    pub title: String,
    /// The file it was read from.
    pub path: PathBuf,
    /// SHA-256 of the file and of the files it names, hexadecimal.
    pub checksum: String,
    /// Seed of all random streams.
    pub seed: u64,
    /// Which light engine.
    pub engine: Engine,
    /// The place.
    pub site: Site,
    /// The air above it.
    pub air: Air,
    /// The sky's light.
    pub night_sky: NightSky,
    /// Brighter skies to plan for besides.
    pub moonlight: Moonlight,
    /// How the array triggers and what keeps it quiet.
    pub trigger: ArrayTrigger,
    /// Telescope kinds.
    pub kinds: Vec<TelescopeKind>,
    /// Telescopes that stand already and stay: members of every layout.
    pub built: Vec<Placed>,
    /// Prices.
    pub tariff: Tariff,
    /// What an event takes on disk.
    pub recording: Recording,
    /// Candidate layouts, explicit and generated, in the order of the file.
    pub layouts: Vec<Layout>,
    /// Names of layouts that are left out, each with that of the layout it equals.
    pub left_out: Vec<[String; 2]>,
    /// Where the telescopes look.
    pub pointing: Pointing,
    /// Gamma-ray sources; the first is the reference.
    pub sources: Vec<Source>,
    /// Background species.
    pub backgrounds: Vec<Background>,
    /// Dead time after each recorded event, us; zero if not stated.
    pub dead_time_us: f64,
    /// How much to simulate.
    pub budget: Budget,
    /// How to rank.
    pub ranking: Ranking,
    /// Other assumptions to repeat the ranking under.
    pub robustness: Option<Robustness>,
}

/// Brighter skies to plan for besides the stated one.
#[derive(Clone, Debug, PartialEq)]
pub struct Moonlight {
    /// Factors on the stated sky.
    pub levels: Vec<f64>,
    /// Share of the showers that each is simulated with.
    pub showers_share: f64,
}

/// How an array triggers.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ArrayTrigger {
    /// Whether the array takes off what a plane front from the pointing needs from pad to pad.
    pub delays_compensated: bool,
    /// What makes a threshold quiet.
    pub quiet: QuietRule,
}

/// The light engine.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Engine {
    /// The fast one: longitudinal profiles and tables.
    Profile,
    /// The reference: particle by particle.
    Cascade,
}

impl Engine {
    /// Its name in the study file.
    pub fn name(self) -> &'static str {
        match self {
            Self::Profile => "profile",
            Self::Cascade => "cascade",
        }
    }
}

/// The place.
#[derive(Clone, Debug, PartialEq)]
pub struct Site {
    /// Its name.
    pub name: String,
    /// Geodetic latitude, degrees north.
    pub latitude_deg: f64,
    /// Longitude, degrees east.
    pub longitude_deg: f64,
    /// Altitude of the reference point above the sea, m.
    pub altitude_m: f64,
    /// Magnetic field, east, north and up, microtesla; absent if the study leaves it off.
    pub field_ut: Option<[f64; 3]>,
    /// Boundary polygon, east and north in metres; empty if none.
    pub boundary_enu_m: Vec<[f64; 2]>,
    /// Excluded ground.
    pub exclusions: Vec<Exclusion>,
    /// Control house, east and north in metres.
    pub control_house_enu_m: Option<[f64; 2]>,
}

impl Site {
    /// The reference point; its altitude above the sea stands for that above the ellipsoid.
    pub fn reference(&self) -> Geodetic {
        Geodetic {
            latitude_deg: self.latitude_deg,
            longitude_deg: self.longitude_deg,
            height_m: self.altitude_m,
        }
    }

    /// Where telescopes may stand.
    pub fn constraints(&self) -> Constraints {
        let boundary = Some(&self.boundary_enu_m).filter(|outline| !outline.is_empty());
        let excluded = self.exclusions.iter().map(|e| (e.name.clone(), e.outline_enu_m.clone()));
        Constraints {
            allowed_m: boundary.into_iter().cloned().collect(),
            forbidden_m: excluded.collect(),
            ..Constraints::default()
        }
    }
}

/// Ground where no telescope may stand.
#[derive(Clone, Debug, PartialEq)]
pub struct Exclusion {
    /// Why.
    pub name: String,
    /// Polygon, east and north in metres.
    pub outline_enu_m: Vec<[f64; 2]>,
}

/// The air above the site.
#[derive(Clone, Debug)]
pub struct Air {
    /// Temperature, density, depth and refractivity by altitude.
    pub atmosphere: Atmosphere,
    /// Vertical aerosol optical depth at 550 nm above the site.
    pub aerosol_depth_550nm: f64,
    /// Angstrom exponent of the aerosol.
    pub angstrom_exponent: f64,
    /// Scale height of the aerosol above the site, m.
    pub aerosol_scale_height_m: f64,
    /// Whether molecules scatter.
    pub molecular: bool,
    /// Whether aerosol attenuates.
    pub aerosol: bool,
    /// Whether ozone absorbs.
    pub ozone: bool,
}

/// A telescope at its place.
#[derive(Clone, Debug, PartialEq)]
pub struct Placed {
    /// Index into [`Study::kinds`].
    pub kind: usize,
    /// East, north, up, m.
    pub enu_m: [f64; 3],
}

/// A candidate layout.
#[derive(Clone, Debug, PartialEq)]
pub struct Layout {
    /// Its name.
    pub name: String,
    /// Its telescopes.
    pub telescopes: Vec<Placed>,
    /// How many must fire.
    pub condition: usize,
    /// Coincidence window of the array, ns.
    pub window_ns: f64,
    /// Its place in a scan of mirror area and spacing, if it is of one.
    pub scan: Option<Scan>,
    /// Line of the study file that it comes from.
    pub line: usize,
}

/// A place in a scan of mirror area and spacing.
#[derive(Clone, Debug, PartialEq)]
pub struct Scan {
    /// Name of the family.
    pub family: String,
    /// Mirror area of its telescopes, m2.
    pub mirror_area_m2: f64,
    /// Spacing, m.
    pub spacing_m: f64,
}

/// Where the telescopes look.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Pointing {
    /// Zenith angle, degrees.
    pub zenith_deg: f64,
    /// Azimuth from north through east, degrees.
    pub azimuth_deg: f64,
    /// Angle of the source from the pointing, degrees.
    pub source_offset_deg: f64,
    /// Where the source stands in the camera: from up, towards the camera's x axis, degrees.
    pub source_bearing_deg: f64,
    /// Half-angle of the cone that backgrounds come from, degrees.
    pub cone_half_angle_deg: f64,
}

/// A spectrum.
#[derive(Clone, Debug, PartialEq)]
pub enum Spectrum {
    /// A published one, by name.
    Named(String),
    /// flux (E / pivot)^-index exp(-E / cutoff), in 1/(m2 s TeV), and per steradian if diffuse.
    PowerLaw {
        /// Flux at the pivot.
        flux_m2_s_tev: f64,
        /// Pivot, TeV.
        pivot_tev: f64,
        /// Index, positive.
        index: f64,
        /// Exponential cut-off, TeV.
        cutoff_tev: Option<f64>,
    },
}

/// A gamma-ray source.
#[derive(Clone, Debug, PartialEq)]
pub struct Source {
    /// Its name.
    pub name: String,
    /// Its spectrum.
    pub spectrum: Spectrum,
}

/// A background species.
#[derive(Clone, Debug, PartialEq)]
pub struct Background {
    /// Primary.
    pub species: Species,
    /// Its spectrum.
    pub spectrum: Spectrum,
}

/// How much to simulate.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Budget {
    /// Gamma showers, each seen from eight core positions.
    pub gamma_showers: u64,
    /// Showers of each background, each seen from eight core positions.
    pub background_showers: u64,
    /// Gamma energies, GeV.
    pub gamma_energy_gev: [f64; 2],
    /// Background energies, GeV.
    pub background_energy_gev: [f64; 2],
    /// Wanted relative error of the leading layout's background rate.
    pub background_rate_error: f64,
    /// Largest distance of a core from the array's centre, m; absent: from the light pool.
    pub impact_radius_m: Option<f64>,
}

/// How to rank.
#[derive(Clone, Debug, PartialEq)]
pub struct Ranking {
    /// Column to order by.
    pub score: String,
    /// Bootstrap resamples.
    pub resamples: usize,
    /// Probability that a telescope is up.
    pub up_probability: f64,
}

/// The volume of data.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Recording {
    /// Bytes of one pixel in one event.
    pub bytes_per_pixel: f64,
    /// Hours of observation a night.
    pub hours_per_night: f64,
}

/// Simulations under other assumptions.
#[derive(Clone, Debug)]
pub struct Robustness {
    /// Another air above the site.
    pub atmosphere: Atmosphere,
    /// Factor on the light of the night sky.
    pub sky_factor: f64,
    /// Share of the gamma showers that is simulated again for each.
    pub showers_share: f64,
}
