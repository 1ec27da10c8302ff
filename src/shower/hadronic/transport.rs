//! Hadrons on their way down.

use crate::numerics::Stream;
use crate::shower::{Primary, Species};

use super::cross_section::interaction_length_g_cm2;
use super::decay::decay;
use super::generator::Interaction;
use super::muon::{BEND_GEV_UT_M, MuonTrack, follow};
use super::particle::{Kind, Secondary};

/// The shower axis as a map between slant depth and distance from the observer.
pub struct Axis<'a> {
    /// Slant depth of the observer, g/cm2.
    pub ground_g_cm2: f64,
    /// Distance from the observer of a slant depth, m.
    pub distance_m: &'a dyn Fn(f64) -> f64,
    /// Slant depth at a distance from the observer, g/cm2: its inverse.
    pub depth_g_cm2: &'a dyn Fn(f64) -> f64,
    /// Field x (unit vector to the source) along the two transverse directions, uT: where positive
    /// particles are pushed.
    pub bend_ut: [f64; 2],
}

/// Below which energies particles are dropped.
#[derive(Clone, Copy, Debug)]
pub struct Floors {
    /// Hadrons: below this they cannot make a photon that emits light, GeV.
    pub hadron_gev: f64,
    /// Photons and electrons: their few electrons end below the Cherenkov threshold, GeV.
    pub photon_gev: f64,
    /// Muons, GeV.
    pub muon_gev: f64,
    /// Photons and electrons below this fraction of the primary's energy are kept at random with a
    /// weight, so that the mean is kept and the number of parts stays below a few thousand.
    pub thinning: f64,
}

impl Default for Floors {
    fn default() -> Self {
        Self { hadron_gev: 1.0, photon_gev: 0.2, muon_gev: 1.0, thinning: 5e-4 }
    }
}

/// A photon, electron or positron that starts an electromagnetic part.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct EmParticle {
    /// Photon, electron or positron.
    pub kind: Kind,
    /// Energy, GeV.
    pub energy_gev: f64,
    /// How many equal ones it stands for.
    pub weight: f64,
    /// Slant depth where it begins, g/cm2.
    pub depth_g_cm2: f64,
    /// Distance from the observer where it begins, m.
    pub distance_m: f64,
    /// Position across the axis there, m.
    pub transverse_m: [f64; 2],
    /// Slope of its flight against the axis, downward.
    pub slope: [f64; 2],
    /// Path by which it lags behind the front of the primary at the speed of light, m.
    pub lag_m: f64,
}

/// What became of a primary.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Core {
    /// Photons and electrons of decays.
    pub photons: Vec<EmParticle>,
    /// Muons.
    pub muons: Vec<MuonTrack>,
    /// Energy of neutrinos, GeV.
    pub neutrino_gev: f64,
    /// Energy of hadrons that reached the ground, GeV.
    pub ground_gev: f64,
    /// Energy given to struck nuclei and, by muons, to the air, GeV.
    pub air_gev: f64,
    /// Energy of particles dropped below the floors, GeV.
    pub dropped_gev: f64,
}

impl Core {
    /// Energy of everything listed, GeV; photons with their weights.
    pub fn energy_gev(&self) -> f64 {
        let photons: f64 = self.photons.iter().map(|p| p.weight * p.energy_gev).sum();
        let muons: f64 = self.muons.iter().map(|muon| muon.energy_at_ground_gev()).sum();
        photons + muons + self.neutrino_gev + self.ground_gev + self.air_gev + self.dropped_gev
    }
}

impl MuonTrack {
    /// Total energy at the ground, GeV; zero for one that does not reach it.
    pub fn energy_at_ground_gev(&self) -> f64 {
        let last = self.nodes.last().map_or(0.0, |node| node.energy_gev);
        if self.at_ground { last } else { 0.0 }
    }
}

/// A particle in flight.
#[derive(Clone, Copy, Debug)]
pub struct Flight {
    /// What it is.
    pub kind: Kind,
    /// Total energy, GeV.
    pub energy_gev: f64,
    /// Slant depth along the main axis, g/cm2.
    pub depth_g_cm2: f64,
    /// Distance from the observer along the main axis, m.
    pub distance_m: f64,
    /// Position across the axis, m.
    pub transverse_m: [f64; 2],
    /// Slope against the axis, downward.
    pub slope: [f64; 2],
    /// Path by which it lags behind the front, m.
    pub lag_m: f64,
}

enum Fate {
    Interacts,
    Decays,
    Lands,
}

struct Walk<'a> {
    axis: &'a Axis<'a>,
    floors: Floors,
    thinning_gev: f64,
    stack: Vec<Flight>,
    products: Vec<Secondary>,
    core: Core,
}

/// Follows a nucleon, nucleus or muon along the axis.
///
/// Nuclei are superpositions of free nucleons, each with its own first interaction. Angles are
/// small: depths are counted along the main axis; products that fly backward are dropped.
pub fn core(
    species: Species,
    energy_gev: f64,
    axis: &Axis<'_>,
    floors: Floors,
    stream: &mut Stream,
) -> Core {
    let top = (axis.distance_m)(1e-3);
    let start = |kind, energy_gev| Flight {
        kind,
        energy_gev,
        depth_g_cm2: 0.0,
        distance_m: top,
        transverse_m: [0.0; 2],
        slope: [0.0; 2],
        lag_m: 0.0,
    };
    let nucleons = |count: u8, charge: u8| {
        let each = energy_gev / f64::from(count);
        let kind = move |i| if i < charge { Kind::Proton } else { Kind::Neutron };
        (0..count).map(|i| start(kind(i), each)).collect::<Vec<_>>()
    };
    let stack = match species {
        Species::Proton => nucleons(1, 1),
        Species::Neutron => nucleons(1, 0),
        Species::Nucleus { mass_number, charge } => nucleons(mass_number, charge),
        Species::MuonMinus => vec![start(Kind::MuonMinus, energy_gev)],
        Species::MuonPlus => vec![start(Kind::MuonPlus, energy_gev)],
        Species::Electron => vec![start(Kind::Electron, energy_gev)],
        Species::Positron => vec![start(Kind::Positron, energy_gev)],
        Species::Gamma => vec![start(Kind::Photon, energy_gev)],
    };
    let thinning_gev = floors.thinning * energy_gev;
    let (products, core) = (Vec::new(), Core::default());
    let mut walk = Walk { axis, floors, thinning_gev, stack, products, core };
    let mut interaction = Interaction::default();
    while let Some(flight) = walk.stack.pop() {
        walk.one(flight, &mut interaction, stream);
    }
    walk.core
}

/// The hadronic core of a primary with the usual floors.
pub fn core_of(primary: &Primary, axis: &Axis<'_>, stream: &mut Stream) -> Core {
    core(primary.species, primary.energy_gev, axis, Floors::default(), stream)
}

impl Walk<'_> {
    fn one(&mut self, flight: Flight, interaction: &mut Interaction, stream: &mut Stream) {
        match flight.kind {
            Kind::Photon | Kind::Electron | Kind::Positron => {
                self.electromagnetic(&flight, stream);
                return;
            }
            Kind::Neutrino => {
                self.core.neutrino_gev += flight.energy_gev;
                return;
            }
            Kind::MuonMinus | Kind::MuonPlus => {
                self.muon(flight, stream);
                return;
            }
            Kind::PionZero | Kind::Eta => {
                self.decayed(&flight, stream);
                return;
            }
            _ => {}
        }
        if flight.energy_gev < self.floors.hadron_gev {
            self.core.dropped_gev += flight.energy_gev;
            return;
        }
        let (at, fate) = self.moved(flight, stream);
        match fate {
            Fate::Lands => self.core.ground_gev += at.energy_gev,
            Fate::Decays => self.decayed(&at, stream),
            Fate::Interacts => {
                interaction.draw(at.kind, at.energy_gev, stream);
                self.core.air_gev += interaction.target_gev;
                for product in &interaction.secondaries {
                    self.launch(&at, product);
                }
            }
        }
    }

    /// Moves a hadron to where it interacts, decays or lands.
    fn moved(&self, from: Flight, stream: &mut Stream) -> (Flight, Fate) {
        let mass = from.kind.mass_gev();
        let momentum = (from.energy_gev.powi(2) - mass * mass).max(1e-6).sqrt();
        let length = interaction_length_g_cm2(from.kind, from.energy_gev);
        let depth = from.depth_g_cm2 + length * stream.exponential();
        let lands = depth >= self.axis.ground_g_cm2;
        let distance = if lands { 0.0 } else { (self.axis.distance_m)(depth) };
        let flown = momentum / mass * from.kind.ctau_m() * stream.exponential();
        let decays = flown < from.distance_m - distance;
        let path = if decays { flown } else { from.distance_m - distance }.max(0.0);
        let bend = f64::from(from.kind.charge()) * BEND_GEV_UT_M * path / momentum;
        let mut at = from;
        for i in 0..2 {
            let turn = bend * self.axis.bend_ut[i];
            at.transverse_m[i] += (from.slope[i] + 0.5 * turn) * path;
            at.slope[i] += turn;
        }
        let tilt = from.slope[0].powi(2) + from.slope[1].powi(2);
        at.lag_m += 0.5 * path * (tilt + (mass / momentum).powi(2));
        if decays {
            at.distance_m = from.distance_m - flown;
            at.depth_g_cm2 = (self.axis.depth_g_cm2)(at.distance_m);
            return (at, Fate::Decays);
        }
        at.distance_m = distance;
        at.depth_g_cm2 = depth;
        (at, if lands { Fate::Lands } else { Fate::Interacts })
    }

    fn decayed(&mut self, at: &Flight, stream: &mut Stream) {
        let mut products = core::mem::take(&mut self.products);
        decay(at.kind, at.energy_gev, stream, &mut products);
        for product in &products {
            self.launch(at, product);
        }
        self.products = products;
    }

    /// Puts a product on its way, or counts its energy as dropped if it flies backward.
    fn launch(&mut self, at: &Flight, product: &Secondary) {
        let [x, y] = product.transverse_gev;
        let forward = product.along_gev > 0.2 * x.hypot(y);
        if product.kind == Kind::Neutrino {
            self.core.neutrino_gev += product.energy_gev;
        } else if forward {
            let slope = [at.slope[0] + x / product.along_gev, at.slope[1] + y / product.along_gev];
            let (kind, energy_gev) = (product.kind, product.energy_gev);
            self.stack.push(Flight { kind, energy_gev, slope, ..*at });
        } else {
            self.core.dropped_gev += product.energy_gev;
        }
    }

    fn electromagnetic(&mut self, at: &Flight, stream: &mut Stream) {
        if at.energy_gev < self.floors.photon_gev {
            self.core.dropped_gev += at.energy_gev;
            return;
        }
        let mut weight = 1.0;
        if at.energy_gev < self.thinning_gev {
            let keep = at.energy_gev / self.thinning_gev;
            if stream.uniform() >= keep {
                return;
            }
            weight = 1.0 / keep;
        }
        let Flight { kind, energy_gev, depth_g_cm2, distance_m, transverse_m, slope, lag_m } = *at;
        self.core.photons.push(EmParticle {
            kind,
            energy_gev,
            weight,
            depth_g_cm2,
            distance_m,
            transverse_m,
            slope,
            lag_m,
        });
    }

    fn muon(&mut self, flight: Flight, stream: &mut Stream) {
        let end = follow(flight, self.axis, self.floors.muon_gev, stream);
        self.core.air_gev += end.lost_gev;
        if let Some(at) = end.decayed {
            self.decayed(&at, stream);
        } else if !end.track.at_ground {
            self.core.dropped_gev += end.track.nodes.last().map_or(0.0, |node| node.energy_gev);
        }
        self.core.muons.push(end.track);
    }
}
