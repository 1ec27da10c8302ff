//! From a primary to the electromagnetic parts and muons that give light.

use nalgebra::Vector3;

use crate::consts::SPEED_OF_LIGHT_M_NS;
use crate::numerics::Stream;
use crate::shower::cascade::CascadeSpecies;
use crate::shower::hadronic::{Axis, EmParticle, Kind, core_of};
use crate::shower::profile::shipped::DevelopmentTable;
use crate::shower::{Primary, Species};

use super::column::AxisPath;
use super::footprint::LightModel;
use super::shower_light::{Part, ShowerParts};

/// Photons with a flatter path than this are left out: their light is spread over kilometres.
const STEEPEST_SLOPE: f64 = 0.3;

/// What gives light in a shower of the fast engine: one part for a photon or electron; for a hadron
/// one part for each photon and electron of its core, and its muons.
///
/// `field_ut` (east, north, up) bends charged hadrons and muons here; the spreading of
/// electrons by the field is in the light model.
pub fn parts(
    primary: &Primary,
    field_ut: Vector3<f64>,
    model: &LightModel,
    table: &DevelopmentTable,
    stream: &mut Stream,
) -> ShowerParts {
    let along = |development| Part { offset_m: [0.0; 2], tilt: [0.0; 2], lag_ns: 0.0, development };
    let energy_gev = primary.energy_gev;
    match primary.species {
        Species::Gamma => {
            let start = table.photon_start_g_cm2(energy_gev, stream);
            vec![along(table.draw(CascadeSpecies::Gamma, energy_gev, start, stream))].into()
        }
        Species::Electron => {
            vec![along(table.draw(CascadeSpecies::Electron, energy_gev, 0.0, stream))].into()
        }
        Species::Positron => {
            vec![along(table.draw(CascadeSpecies::Positron, energy_gev, 0.0, stream))].into()
        }
        _ => {
            let path = model.column.axis(primary.direction.zenith_rad);
            let (across, up) = primary.direction.transverse();
            let bend = field_ut.cross(&primary.direction.to_source());
            let axis = Axis {
                ground_g_cm2: path.ground_depth_g_cm2,
                distance_m: &|depth| path.distance_at_m(depth),
                depth_g_cm2: &|distance| path.depth_at_g_cm2(distance),
                bend_ut: [bend.dot(&across), bend.dot(&up)],
            };
            let core = core_of(primary, &axis, stream);
            let photons = core.photons.iter();
            let parts = photons.filter_map(|photon| part(photon, &path, table, stream)).collect();
            ShowerParts { parts, muons: core.muons }
        }
    }
}

fn part(
    photon: &EmParticle,
    path: &AxisPath,
    table: &DevelopmentTable,
    stream: &mut Stream,
) -> Option<Part> {
    let [x, y] = photon.slope;
    let (species, wait) = match photon.kind {
        Kind::Electron => (CascadeSpecies::Electron, 0.0),
        Kind::Positron => (CascadeSpecies::Positron, 0.0),
        _ => (CascadeSpecies::Gamma, table.photon_start_g_cm2(photon.energy_gev, stream)),
    };
    let start = photon.depth_g_cm2 + wait;
    if x.hypot(y) > STEEPEST_SLOPE || start >= path.ground_depth_g_cm2 {
        return None;
    }
    let development = table.draw(species, photon.energy_gev, start, stream).weighted(photon.weight);
    let down = photon.distance_m;
    let offset_m = [photon.transverse_m[0] + x * down, photon.transverse_m[1] + y * down];
    let lag_m = photon.lag_m + 0.5 * down * (x * x + y * y);
    Some(Part { offset_m, tilt: [-x, -y], lag_ns: lag_m / SPEED_OF_LIGHT_M_NS, development })
}
