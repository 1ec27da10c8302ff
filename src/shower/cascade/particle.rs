//! What goes into the cascade and what comes out of it.

use nalgebra::Vector3;

use crate::consts::{ELECTRON_MASS_GEV, SPEED_OF_LIGHT_M_NS};

/// The three kinds of particle the electromagnetic cascade knows.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum CascadeSpecies {
    /// A photon.
    Gamma,
    /// An electron.
    Electron,
    /// A positron.
    Positron,
}

impl CascadeSpecies {
    /// Electric charge in units of the proton's.
    #[inline]
    pub fn charge(self) -> f64 {
        match self {
            Self::Gamma => 0.0,
            Self::Electron => -1.0,
            Self::Positron => 1.0,
        }
    }
}

/// One particle handed to the cascade.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CascadeParticle {
    /// Its kind.
    pub species: CascadeSpecies,
    /// Total energy, GeV.
    pub energy_gev: f64,
    /// Position in the ground frame, m; z = 0 is the observer's altitude.
    pub position: Vector3<f64>,
    /// Unit vector of flight (downward-going showers have a negative z).
    pub direction: Vector3<f64>,
    /// Time, ns.
    pub time_ns: f64,
    /// Change of direction per microtesla of transverse field so far, rad/uT; zero for primaries.
    pub angle_lever: f64,
    /// Change of position per microtesla of transverse field so far, m/uT; zero for primaries.
    pub offset_lever: f64,
}

impl CascadeParticle {
    /// A particle without history.
    pub fn new(
        species: CascadeSpecies,
        energy_gev: f64,
        position: Vector3<f64>,
        direction: Vector3<f64>,
        time_ns: f64,
    ) -> Self {
        let (angle_lever, offset_lever) = (0.0, 0.0);
        Self { species, energy_gev, position, direction, time_ns, angle_lever, offset_lever }
    }
}

/// A short piece of the track of a charged particle.
///
/// The piece is close to straight. Inside it the direction wanders: at the fraction f of its
/// length it is the interpolation of the two ends plus a normal deviate of
/// `scatter_rad sqrt(f (1 - f))` in each of the two transverse planes.
#[derive(Clone, Copy, Debug)]
pub struct TrackStep {
    /// Where it begins, ground frame, m.
    pub start: Vector3<f64>,
    /// Where it ends, m.
    pub end: Vector3<f64>,
    /// Unit vector of flight at the start.
    pub start_direction: Vector3<f64>,
    /// Unit vector of flight at the end.
    pub end_direction: Vector3<f64>,
    /// Plane-projected width of the scattering over the whole step, rad.
    pub scatter_rad: f64,
    /// Length of the path, m (at least the distance between the ends).
    pub length_m: f64,
    /// The same in mass per area, g/cm2; informative only.
    pub thickness_g_cm2: f64,
    /// Total energy at the start, GeV.
    pub start_energy_gev: f64,
    /// Total energy at the end, GeV.
    pub end_energy_gev: f64,
    /// Time at the start, ns.
    pub start_time_ns: f64,
    /// Time at the end, ns.
    pub end_time_ns: f64,
    /// Rest mass, GeV.
    pub mass_gev: f64,
    /// Charge in units of the proton's.
    pub charge: f64,
    /// Magnetic lever of the direction at the middle of the step, rad/uT.
    pub angle_lever: f64,
    /// Magnetic lever of the position at the middle of the step, m/uT.
    pub offset_lever: f64,
}

impl TrackStep {
    /// A straight track of constant energy at the speed of light over its Lorentz factor.
    pub fn straight(
        start: Vector3<f64>,
        direction: Vector3<f64>,
        length_m: f64,
        energy_gev: f64,
        mass_gev: f64,
        charge: f64,
        start_time_ns: f64,
    ) -> Self {
        let beta = (1.0 - (mass_gev / energy_gev).powi(2)).max(0.0).sqrt();
        Self {
            start,
            end: start + direction * length_m,
            start_direction: direction,
            end_direction: direction,
            scatter_rad: 0.0,
            length_m,
            thickness_g_cm2: 0.0,
            start_energy_gev: energy_gev,
            end_energy_gev: energy_gev,
            start_time_ns,
            end_time_ns: start_time_ns + length_m / (beta * SPEED_OF_LIGHT_M_NS),
            mass_gev,
            charge,
            angle_lever: 0.0,
            offset_lever: 0.0,
        }
    }
}

/// Takes the charged tracks of a shower as they are made.
pub trait TrackSink {
    /// One step of one charged particle.
    fn step(&mut self, step: &TrackStep);

    /// The first interaction of a primary photon, called once per photon handed in.
    fn first_interaction(&mut self, _position: &Vector3<f64>) {}
}

/// A sink that drops everything.
#[derive(Clone, Copy, Debug, Default)]
pub struct NoSink;

impl TrackSink for NoSink {
    fn step(&mut self, _step: &TrackStep) {}
}

/// Where the cascade stops following particles and which collisions are followed one by one.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Cuts {
    /// Charged particles below this total energy are dropped, GeV.
    pub electron_gev: f64,
    /// Photons below this energy are dropped, GeV.
    pub photon_gev: f64,
    /// Photons radiated below this energy are a continuous loss, GeV.
    pub soft_photon_gev: f64,
    /// Largest share of its kinetic energy a particle loses smoothly in one step.
    pub step_loss: f64,
    /// Largest thickness of one step, g/cm2.
    pub step_g_cm2: f64,
}

impl Cuts {
    /// Cuts for Cherenkov light of particles above a threshold energy.
    ///
    /// A photon below the electron threshold cannot make an electron above it, so both cuts are
    /// the same and no light is lost.
    pub fn at_threshold(electron_threshold_gev: f64) -> Self {
        Self {
            electron_gev: electron_threshold_gev,
            photon_gev: electron_threshold_gev,
            soft_photon_gev: 0.5 * electron_threshold_gev,
            step_loss: 0.15,
            step_g_cm2: 6.0,
        }
    }

    /// Low cuts for comparison with cascade theory: particles are followed to a kinetic energy of
    /// `energy_gev` (about 1 MeV).
    pub fn low(energy_gev: f64) -> Self {
        Self {
            electron_gev: energy_gev + ELECTRON_MASS_GEV,
            photon_gev: energy_gev,
            soft_photon_gev: energy_gev,
            step_loss: 0.15,
            step_g_cm2: 6.0,
        }
    }
}

/// Where the energy went, GeV.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Ledger {
    /// Lost smoothly by ionisation.
    pub ionisation_gev: f64,
    /// Lost smoothly as soft photons.
    pub soft_radiation_gev: f64,
    /// Carried by particles dropped below the cuts, rest mass of electrons included.
    pub dropped_gev: f64,
    /// Carried through the observer's level or out of the top.
    pub escaped_gev: f64,
    /// Rest energy taken from the air as knocked-on or annihilated electrons (negative side).
    pub borrowed_gev: f64,
    /// Number of steps of charged particles.
    pub steps: u64,
    /// Number of photons followed.
    pub photons: u64,
}

impl Ledger {
    /// Energy found again, to be compared with the sum of the energies handed in.
    pub fn total_gev(&self) -> f64 {
        self.ionisation_gev + self.soft_radiation_gev + self.dropped_gev + self.escaped_gev
            - self.borrowed_gev
    }
}
