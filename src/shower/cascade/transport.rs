//! Moves particles through the air until they fall below the cuts or reach the observer's level.

use nalgebra::Vector3;

use crate::atmosphere::Atmosphere;
use crate::consts::{ELECTRON_MASS_GEV, SPEED_OF_LIGHT_M_NS};
use crate::numerics::Stream;

use super::air::AirTable;
use super::bremsstrahlung::PhotonSpectrum;
use super::pair::PairSpectrum;
use super::particle::{CascadeParticle, CascadeSpecies, Cuts, Ledger, TrackSink, TrackStep};
use super::photon;
use super::rates::Rates;
use super::vertex::Vertex;

/// Curvature of a track of unit charge, rad per metre and uT, times momentum in GeV/c:
/// p (GeV/c) = 0.299792458 B (T) r (m).
pub const CURVATURE_GEV_UT_M: f64 = 0.299_792_458e-6;

/// Longest step of a charged particle, m: the refractive index changes little along it.
const LONGEST_STEP_M: f64 = 400.0;

/// The air, the field and the tables a cascade runs in; made once, shared by all threads.
#[derive(Clone, Debug)]
pub struct Environment {
    /// Fast tables of the air.
    pub air: AirTable,
    /// Altitude of the plane z = 0, where particles stop, m.
    pub observer_altitude_m: f64,
    /// Magnetic field in the ground frame (east, north, up), uT.
    pub field_ut: Vector3<f64>,
    /// The cuts.
    pub cuts: Cuts,
    /// Interaction rates.
    pub rates: Rates,
    pub(super) pair: PairSpectrum,
    pub(super) radiation: PhotonSpectrum,
}

impl Environment {
    /// Builds the tables; some 30 ms.
    pub fn new(
        atmosphere: &Atmosphere,
        observer_altitude_m: f64,
        field_ut: Vector3<f64>,
        cuts: Cuts,
    ) -> Self {
        Self {
            air: AirTable::new(atmosphere, observer_altitude_m),
            observer_altitude_m,
            field_ut,
            cuts,
            rates: Rates::new(&cuts),
            pair: PairSpectrum::default(),
            radiation: PhotonSpectrum::default(),
        }
    }
}

/// Follows particles and all their children; charged tracks go to `sink`.
///
/// Depth first, the child of lowest energy first, so that the stack holds tens of particles.
///
/// # Validity
/// Energies 1 MeV to 100 TeV. The suppression of soft radiation in dense media (Landau,
/// Pomeranchuk, Migdal) is left out: at sea level it sets in below k = E^2 / 234 PeV, 4e-4 of the
/// energy of a 100 TeV electron, and higher up less.
pub fn transport(
    particles: Vec<CascadeParticle>,
    environment: &Environment,
    stream: &mut Stream,
    sink: &mut impl TrackSink,
) -> Ledger {
    let mut shower = Shower { environment, stream, stack: particles, ledger: Ledger::default() };
    let primaries = shower.stack.len();
    for place in 0..primaries {
        // The primaries lie at the bottom: take them out one by one, the last first.
        let primary = shower.stack.remove(primaries - 1 - place);
        let kept = core::mem::take(&mut shower.stack);
        shower.follow(primary, sink, true);
        while let Some(particle) = shower.stack.pop() {
            shower.follow(particle, sink, false);
        }
        shower.stack = kept;
    }
    shower.ledger
}

pub(super) struct Shower<'a> {
    pub(super) environment: &'a Environment,
    pub(super) stream: &'a mut Stream,
    pub(super) stack: Vec<CascadeParticle>,
    pub(super) ledger: Ledger,
}

impl Shower<'_> {
    fn follow(&mut self, particle: CascadeParticle, sink: &mut impl TrackSink, primary: bool) {
        match particle.species {
            CascadeSpecies::Gamma => {
                photon::follow(self, particle, |position| {
                    if primary {
                        sink.first_interaction(position);
                    }
                });
            }
            _ => self.follow_charged(particle, sink),
        }
    }

    /// Puts a child on the stack, or in the ledger if it is below the cuts.
    #[inline]
    pub(super) fn push(&mut self, particle: CascadeParticle) {
        let cut = match particle.species {
            CascadeSpecies::Gamma => self.environment.cuts.photon_gev,
            _ => self.environment.cuts.electron_gev,
        };
        if particle.energy_gev > cut {
            self.stack.push(particle);
        } else {
            self.ledger.dropped_gev += particle.energy_gev;
        }
    }

    fn follow_charged(&mut self, mut particle: CascadeParticle, sink: &mut impl TrackSink) {
        let mut budget = self.stream.exponential();
        loop {
            match self.charged_step(&mut particle, &mut budget, sink) {
                Outcome::Continue => {}
                Outcome::Ended => return,
                Outcome::Collision(vertex) => {
                    if !self.collide(&mut particle, vertex) {
                        return;
                    }
                    budget = self.stream.exponential();
                }
                Outcome::Fictitious => budget = self.stream.exponential(),
            }
        }
    }

    /// One step: to the next collision candidate, a limit of the step, the cut or the ground.
    fn charged_step(
        &mut self,
        particle: &mut CascadeParticle,
        budget: &mut f64,
        sink: &mut impl TrackSink,
    ) -> Outcome {
        let environment = self.environment;
        let (air, cuts) = (&environment.air, &environment.cuts);
        let positron = particle.species == CascadeSpecies::Positron;
        let energy = particle.energy_gev;
        if energy <= cuts.electron_gev {
            self.ledger.dropped_gev += energy;
            return Outcome::Ended;
        }
        let altitude = air.altitude_m(&particle.position);
        if altitude > air.top_m() {
            self.ledger.escaped_gev += energy;
            return Outcome::Ended;
        }
        let rates = environment.rates.charged(energy, positron);
        let (density, half_log_density) = air.density(altitude);
        let effect = environment.rates.density_effect(
            (energy / ELECTRON_MASS_GEV).ln() * core::f64::consts::LOG10_E + half_log_density,
        );
        let ionisation = f64::from(rates.ionisation) - f64::from(rates.density_scale) * effect;
        let loss = ionisation + f64::from(rates.soft_radiation);

        // The step ends at the nearest of: collision, loss limit, thickness limit, cut.
        let bound = f64::from(rates.bound);
        let mut thickness = *budget / bound;
        let mut end = End::Collision;
        let limit = (cuts.step_loss * (energy - ELECTRON_MASS_GEV) / loss).min(cuts.step_g_cm2);
        if thickness > limit {
            (thickness, end) = (limit, End::Limit);
        }
        let to_cut = (energy - cuts.electron_gev) / loss;
        if thickness > to_cut {
            (thickness, end) = (to_cut, End::Cut);
        }
        let descent = air.descent(&particle.position, &particle.direction);
        let guess = thickness / density;
        let (middle, _) = air.density(altitude - 0.5 * descent * guess);
        let mut length = thickness / middle;
        if length > LONGEST_STEP_M {
            (length, end) = (LONGEST_STEP_M, End::Limit);
            let (middle, _) = air.density(altitude - 0.5 * descent * length);
            thickness = length * middle;
        }
        let fall = altitude - environment.observer_altitude_m;
        if descent * length > fall {
            let share = (fall / (descent * length)).max(0.0);
            length *= share;
            thickness *= share;
            end = End::Ground;
        }
        let lost = loss * thickness;
        self.ledger.ionisation_gev += ionisation * thickness;
        self.ledger.soft_radiation_gev += lost - ionisation * thickness;
        self.ledger.steps += 1;
        let soft_rad2 = f64::from(rates.soft_rad2);
        self.advance(particle, Advance { length, thickness, lost, soft_rad2 }, sink);
        *budget -= thickness * bound;
        match end {
            End::Limit => Outcome::Continue,
            End::Cut => {
                self.ledger.dropped_gev += particle.energy_gev;
                Outcome::Ended
            }
            End::Ground => {
                self.ledger.escaped_gev += particle.energy_gev;
                Outcome::Ended
            }
            End::Collision => self.choose(particle.energy_gev, positron, bound),
        }
    }

    /// Which collision takes place, by the rates at the end of the step, if any.
    fn choose(&mut self, energy: f64, positron: bool, bound: f64) -> Outcome {
        let rates = self.environment.rates.charged(energy, positron);
        let target = (bound * self.stream.uniform()) as f32;
        if target < rates.radiation {
            Outcome::Collision(Vertex::Radiation)
        } else if target < rates.knock_on {
            Outcome::Collision(Vertex::KnockOn)
        } else if target < rates.annihilation {
            Outcome::Collision(Vertex::Annihilation)
        } else if target < rates.total {
            Outcome::Collision(Vertex::Scattering { edge_rad2: f64::from(rates.edge_rad2) })
        } else {
            Outcome::Fictitious
        }
    }

    /// Moves a charged particle: scattering with its correlated displacement (Fermi and Eyges),
    /// the field, losses and time.
    fn advance(
        &mut self,
        particle: &mut CascadeParticle,
        advance: Advance,
        sink: &mut impl TrackSink,
    ) {
        let Advance { length, thickness, lost, soft_rad2 } = advance;
        let start = *particle;
        let end_energy = start.energy_gev - lost;
        // Mean of 1/E^2 over a step of constant loss is 1 / (E_start E_end).
        let square = soft_rad2 * thickness * start.energy_gev / end_energy;
        let width = (0.5 * square).sqrt();
        let direction = start.direction;
        let (across, up) = basis(&direction);
        let stream = &mut *self.stream;
        let (g1, g2) = (stream.normal(), stream.normal());
        let (g3, g4) = (stream.normal(), stream.normal());
        let charge = start.species.charge();
        let middle_energy = 0.5 * (start.energy_gev + end_energy);
        let bend = charge * CURVATURE_GEV_UT_M * length / middle_energy;
        let force = direction.cross(&self.environment.field_ut) * bend;
        let turned = direction + across * (width * g1) + up * (width * g2) + force;
        let turned = turned / turned.norm();
        let sideways = width * length / 12.0_f64.sqrt();
        let chord = (direction + turned) * (0.5 * length);
        particle.position += chord + across * (sideways * g3) + up * (sideways * g4);
        particle.direction = turned;
        particle.energy_gev = end_energy;
        let slowness = 1.0 + 0.5 * (ELECTRON_MASS_GEV / middle_energy).powi(2);
        particle.time_ns += length * slowness / SPEED_OF_LIGHT_M_NS;
        particle.angle_lever += bend;
        particle.offset_lever += (start.angle_lever + 0.5 * bend) * length;
        sink.step(&TrackStep {
            start: start.position,
            end: particle.position,
            start_direction: direction,
            end_direction: turned,
            scatter_rad: width,
            length_m: length,
            thickness_g_cm2: thickness,
            start_energy_gev: start.energy_gev,
            end_energy_gev: end_energy,
            start_time_ns: start.time_ns,
            end_time_ns: particle.time_ns,
            mass_gev: ELECTRON_MASS_GEV,
            charge,
            angle_lever: 0.5 * (start.angle_lever + particle.angle_lever),
            offset_lever: 0.5 * (start.offset_lever + particle.offset_lever),
        });
    }
}

struct Advance {
    length: f64,
    thickness: f64,
    lost: f64,
    soft_rad2: f64,
}

enum End {
    Collision,
    Limit,
    Cut,
    Ground,
}

enum Outcome {
    Continue,
    Ended,
    Fictitious,
    Collision(Vertex),
}

/// Two unit vectors across a direction.
///
/// # Source
/// Duff et al. 2017, J. Comput. Graph. Tech. 6, 1.
#[inline]
pub(super) fn basis(n: &Vector3<f64>) -> (Vector3<f64>, Vector3<f64>) {
    let sign = 1.0_f64.copysign(n.z);
    let a = -1.0 / (sign + n.z);
    let b = n.x * n.y * a;
    (
        Vector3::new(1.0 + sign * n.x * n.x * a, sign * b, -sign * n.x),
        Vector3::new(b, sign + n.y * n.y * a, -n.y),
    )
}
