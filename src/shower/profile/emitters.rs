//! The states of the charged particles that emit light, by shower age.

/// One charged particle as light sees it: an equal-weight sample of track length above threshold.
///
/// # Units
/// Angles in rad and lateral offsets in g/cm2 (metres times local density), both relative to the
/// axis of the shower, in any two fixed perpendicular directions: showers without a field are
/// symmetric about the axis, so a sample may be turned about it freely as long as its angle and
/// offset turn together.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Emitter {
    /// Total energy, GeV.
    pub energy_gev: f32,
    /// Flight direction relative to the axis, rad.
    pub angle_rad: [f32; 2],
    /// Position relative to the axis, g/cm2.
    pub offset_g_cm2: [f32; 2],
    /// How far it lags behind a plane front at the speed of light, g/cm2 of path.
    pub lag_g_cm2: f32,
    /// Change of the direction per microtesla of transverse field, times local density:
    /// rad uT^-1 kg m^-3. Signed by charge; along the axis direction crossed with the field.
    pub angle_lever: f32,
    /// Change of the position per microtesla, times density squared: m uT^-1 (kg m^-3)^2.
    pub offset_lever: f32,
}

/// The emitters of one shower age.
#[derive(Clone, Debug)]
pub struct EmitterNode {
    /// Shower age s = 3 t / (t + 2 t_max), t from the first interaction.
    pub age: f64,
    /// Charged track length of the emitters per charged particle of the longitudinal profile:
    /// the fraction of all track length that is above [`EmitterTable::floor_gev`].
    pub fraction: f64,
    /// Equal-weight samples.
    pub emitters: Vec<Emitter>,
}

/// Emitters by energy of the primary and age: all ages of the lowest energy first, nodes of one
/// energy sorted by rising age. All energies have the same ages.
#[derive(Clone, Debug)]
pub struct EmitterTable {
    /// Energy above which particles are counted, GeV.
    pub floor_gev: f64,
    /// Where it comes from, for the list of models used.
    pub source: String,
    /// Energies of the primaries, GeV, rising.
    pub energies_gev: Vec<f64>,
    /// The nodes.
    pub nodes: Vec<EmitterNode>,
}

impl EmitterTable {
    /// The ages of the nodes.
    pub fn ages(&self) -> Vec<f64> {
        let count = self.nodes.len() / self.energies_gev.len();
        self.nodes[..count].iter().map(|node| node.age).collect()
    }
}
