//! From a primary to the electromagnetic parts that give light.

use crate::numerics::Stream;
use crate::shower::cascade::CascadeSpecies;
use crate::shower::hadronic::{Axis, EmParticle, core};
use crate::shower::profile::GaisserHillas;
use crate::shower::profile::shipped::DevelopmentTable;
use crate::shower::{Primary, Species};

use super::column::AxisPath;
use super::footprint::LightModel;
use super::shower_light::Part;

/// Photons with a flatter path than this are left out: their light is spread over kilometres.
const STEEPEST_SLOPE: f64 = 0.3;

/// The parts of a shower of the fast engine: one for a photon or electron, one for each photon of
/// the hadronic core otherwise. Single muons give none in this pass.
pub fn parts(
    primary: &Primary,
    model: &LightModel,
    table: &DevelopmentTable,
    stream: &mut Stream,
) -> Vec<Part> {
    let along = |development| Part { offset_m: [0.0; 2], tilt: [0.0; 2], lag_ns: 0.0, development };
    let energy_gev = primary.energy_gev;
    match primary.species {
        Species::Gamma => {
            let start = table.photon_start_g_cm2(energy_gev, stream);
            vec![along(table.draw(CascadeSpecies::Gamma, energy_gev, start, stream))]
        }
        Species::Electron => {
            vec![along(table.draw(CascadeSpecies::Electron, energy_gev, 0.0, stream))]
        }
        Species::Positron => {
            vec![along(table.draw(CascadeSpecies::Positron, energy_gev, 0.0, stream))]
        }
        Species::MuonMinus | Species::MuonPlus => Vec::new(),
        Species::Proton | Species::Neutron | Species::Nucleus { .. } => {
            let path = model.column.axis(primary.direction.zenith_rad);
            let axis = Axis {
                ground_g_cm2: path.ground_depth_g_cm2,
                distance_m: &|depth| path.distance_at_m(depth),
            };
            let core = core(primary.species, energy_gev, &axis, stream);
            core.photons.iter().filter_map(|photon| part(photon, &path, table, stream)).collect()
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
    let start = photon.depth_g_cm2 + table.photon_start_g_cm2(photon.energy_gev, stream);
    if x.hypot(y) > STEEPEST_SLOPE || start >= path.ground_depth_g_cm2 {
        return None;
    }
    let drawn = table.draw(CascadeSpecies::Gamma, photon.energy_gev, start, stream);
    let development = GaisserHillas::new(
        drawn.start_g_cm2,
        drawn.max_g_cm2,
        drawn.length_g_cm2,
        drawn.track_g_cm2 * photon.weight,
    );
    let down = photon.distance_m;
    let offset_m = [photon.transverse_m[0] + x * down, photon.transverse_m[1] + y * down];
    Some(Part { offset_m, tilt: [-x, -y], lag_ns: 0.0, development })
}
