//! How events are thrown: importance sampling in energy, impact and direction.

use core::f64::consts::{PI, TAU};

use nalgebra::Vector3;

use crate::numerics::{Stage, Stream};
use crate::shower::{Direction, Primary, Species};

use super::{CORES_PER_SHOWER, EVENTS_PER_WORD, SHOWERS_PER_WORD};

/// What is thrown at the array.
#[derive(Clone, Debug, PartialEq)]
pub struct Throw {
    /// Kind of primary.
    pub species: Species,
    /// Seed of the study.
    pub seed: u64,
    /// Least and greatest total energy, GeV.
    pub energy_gev: (f64, f64),
    /// Energies are thrown as E^-index.
    pub index: f64,
    /// Where the telescopes look.
    pub pointing: Direction,
    /// Half-angle of the cone of directions around the pointing, rad; zero for a point source.
    pub cone_rad: f64,
    /// Centre of the thrown area, ground frame, m.
    pub centre_m: [f64; 2],
    /// Outer radii of the rings of impact distance, rising, m, across the direction of flight.
    pub rings_m: Vec<f64>,
    /// Words in each ring.
    pub words: usize,
}

/// One word to be simulated.
#[derive(Clone, Debug)]
pub struct Thrown {
    /// Total energy, GeV.
    pub energy_gev: f64,
    /// Ring of impact distance.
    pub ring: usize,
    /// What each event of this word stands for when multiplied by a differential flux per GeV
    /// (and per sr if thrown in a cone): m2 GeV (sr).
    pub exposure: f64,
    /// Showers: direction, and cores on the ground relative to the reference point, m.
    pub showers: Vec<(Primary, Vec<Vector3<f64>>)>,
}

impl Throw {
    /// Number of words in all rings of one repetition.
    pub fn word_count(&self) -> usize {
        self.words * self.rings_m.len()
    }

    /// Solid angle of the cone, sr; 1 for a point source, so that exposures stay in m2 GeV.
    pub fn solid_angle_sr(&self) -> f64 {
        if self.cone_rad > 0.0 { TAU * (1.0 - self.cone_rad.cos()) } else { 1.0 }
    }

    /// Area of a ring across the direction of flight, m2.
    pub fn ring_area_m2(&self, ring: usize) -> f64 {
        let inner = if ring == 0 { 0.0 } else { self.rings_m[ring - 1] };
        PI * (self.rings_m[ring].powi(2) - inner * inner)
    }

    /// Areas of all rings, m2.
    pub fn ring_areas_m2(&self) -> Vec<f64> {
        (0..self.rings_m.len()).map(|ring| self.ring_area_m2(ring)).collect()
    }

    /// The word of one number: the same whatever else is thrown. Numbers from
    /// [`Throw::word_count`] on repeat the throw with fresh randomness; a sample of n repetitions
    /// divides the exposures by n.
    ///
    /// Energies are stratified: word w of n draws its energy from the w-th of n equal shares of
    /// the thrown spectrum, so that a rate's error is that of showers, not of energies.
    pub fn word(&self, number: usize) -> Thrown {
        let (ring, place) = (number % self.rings_m.len(), number / self.rings_m.len() % self.words);
        let key = [species_key(self.species), number as u64];
        let mut stream = Stream::keyed(self.seed, Stage::Primary, &key);
        let rank = (place as f64 + stream.uniform()) / self.words as f64;
        let (low, high) = self.energy_gev;
        let power = 1.0 - self.index;
        // Integral of E^-index is a difference of powers; the logarithm is its limit at index 1.
        let (energy_gev, per_gev) = if power.abs() < 1e-9 {
            let energy = low * (high / low).powf(rank);
            (energy, 1.0 / (energy * (high / low).ln()))
        } else {
            let (a, b) = (low.powf(power), high.powf(power));
            let energy = (a + rank * (b - a)).powf(1.0 / power);
            (energy, power * energy.powf(-self.index) / (b - a))
        };
        let events = (self.words * EVENTS_PER_WORD) as f64;
        let exposure = self.ring_area_m2(ring) * self.solid_angle_sr() / (per_gev * events);
        let showers = (0..SHOWERS_PER_WORD).map(|_| {
            let direction = self.direction(&mut stream);
            let primary = Primary { species: self.species, energy_gev, direction };
            let cores = (0..CORES_PER_SHOWER).map(|_| self.core(direction, ring, &mut stream));
            (primary, cores.collect())
        });
        Thrown { energy_gev, ring, exposure, showers: showers.collect() }
    }

    fn direction(&self, stream: &mut Stream) -> Direction {
        if self.cone_rad <= 0.0 {
            return self.pointing;
        }
        let cosine = 1.0 - stream.uniform() * (1.0 - self.cone_rad.cos());
        let sine = (1.0 - cosine * cosine).sqrt();
        let (cos, sin) = stream.direction();
        let (across, along) = self.pointing.transverse();
        let to_source = self.pointing.to_source() * cosine + (across * cos + along * sin) * sine;
        Direction::of(&to_source)
    }

    /// A core uniform in a ring of the plane across the direction, carried down to the ground.
    fn core(&self, direction: Direction, ring: usize, stream: &mut Stream) -> Vector3<f64> {
        let inner = if ring == 0 { 0.0 } else { self.rings_m[ring - 1] };
        let (inner2, outer2) = (inner * inner, self.rings_m[ring].powi(2));
        let distance = (inner2 + stream.uniform() * (outer2 - inner2)).sqrt();
        let (cos, sin) = stream.direction();
        let (across, along) = direction.transverse();
        let offset = (across * cos + along * sin) * distance;
        let to_source = direction.to_source();
        let ground = offset - to_source * (offset.z / to_source.z);
        Vector3::new(ground.x + self.centre_m[0], ground.y + self.centre_m[1], 0.0)
    }
}

/// A number that names a species in the keys of random streams.
pub fn species_key(species: Species) -> u64 {
    match species {
        Species::Gamma => 1,
        Species::Electron => 2,
        Species::Positron => 3,
        Species::MuonMinus => 4,
        Species::MuonPlus => 5,
        Species::Proton => 6,
        Species::Neutron => 7,
        Species::Nucleus { mass_number, charge } => {
            1_000 + 1_000 * u64::from(mass_number) + u64::from(charge)
        }
    }
}

/// The species that a key names.
pub fn species_of_key(key: u64) -> Option<Species> {
    Some(match key {
        1 => Species::Gamma,
        2 => Species::Electron,
        3 => Species::Positron,
        4 => Species::MuonMinus,
        5 => Species::MuonPlus,
        6 => Species::Proton,
        7 => Species::Neutron,
        _ => {
            let mass_number = u8::try_from((key.checked_sub(1_000)?) / 1_000).ok()?;
            let charge = u8::try_from(key % 1_000).ok()?;
            (mass_number > 0).then_some(Species::Nucleus { mass_number, charge })?
        }
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn throw() -> Throw {
        Throw {
            species: Species::Proton,
            seed: 1,
            energy_gev: (10.0, 1e5),
            index: 1.6,
            pointing: Direction { zenith_rad: 0.35, azimuth_rad: 1.0 },
            cone_rad: 0.1,
            centre_m: [0.0; 2],
            rings_m: vec![150.0, 400.0],
            words: 4_000,
        }
    }

    #[test]
    fn exposures_add_up_to_area_solid_angle_and_flux_integral() {
        let throw = throw();
        // Flux E^-2.7 per GeV: integral (10^-1.7 - 1e5^-1.7) / 1.7.
        let sum: f64 = (0..throw.word_count())
            .map(|number| throw.word(number))
            .map(|word| word.exposure * 64.0 * word.energy_gev.powf(-2.7))
            .sum();
        let flux = (10.0_f64.powf(-1.7) - 1e5_f64.powf(-1.7)) / 1.7;
        let exact = PI * 400.0_f64.powi(2) * throw.solid_angle_sr() * flux;
        assert!((sum / exact - 1.0).abs() < 5e-3, "{}", sum / exact);
    }

    #[test]
    fn cores_keep_their_distance_from_the_axis_through_the_centre() {
        let throw = throw();
        for number in 0..20 {
            let word = throw.word(number);
            for (primary, cores) in word.showers {
                let to_source = primary.direction.to_source();
                let from_pointing = to_source.dot(&throw.pointing.to_source()).acos();
                assert!(from_pointing <= 0.1 + 1e-9);
                for core in cores {
                    let across = (core - to_source * core.dot(&to_source)).norm();
                    let inside = if word.ring == 0 { 0.0..=150.001 } else { 149.999..=400.001 };
                    assert!(inside.contains(&across), "{across}");
                }
            }
        }
    }
}
