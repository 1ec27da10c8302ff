//! The plain result of a plan: numbers with their errors and units, no behaviour.

use super::thresholds::SkyLevelRow;

/// Everything the writers need.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct PlanResult {
    /// Where the numbers come from.
    pub provenance: Provenance,
    /// The site, as planned for.
    pub site: SiteSummary,
    /// Layouts, best first.
    pub ranking: Vec<LayoutRow>,
    /// Rate and peak energy of each primary in each layout.
    pub primaries: Vec<PrimaryRow>,
    /// Trigger-level effective areas by layout, primary and energy bin.
    pub effective_areas: Vec<AreaRow>,
    /// Differential trigger rates by layout, primary and energy bin.
    pub differential_rates: Vec<RateRow>,
    /// Cherenkov light on the ground.
    pub light_pool: Vec<PoolRow>,
    /// Night sky and thresholds by telescope kind.
    pub kinds: Vec<KindRow>,
    /// Where the telescopes of each layout stand.
    pub maps: Vec<LayoutMap>,
    /// How far the light of a gamma ray at the leading layout's threshold reaches.
    pub reach: Option<PoolReach>,
    /// Scans of mirror area and spacing.
    pub scans: Vec<ScanRow>,
    /// Every source's own order.
    pub sources: Vec<SourceRow>,
    /// Gamma rates under other assumptions.
    pub orders: Vec<OrderRow>,
    /// What changes places under them.
    pub order_changes: Vec<OrderChange>,
    /// Thresholds and rates by sky level and layout.
    pub sky_levels: Vec<SkyLevelRow>,
    /// Leading layouts event by event.
    pub finalists: Vec<FinalistRow>,
    /// Their direction resolution.
    pub directions: Vec<DirectionRow>,
    /// Counts of out-of-table look-ups and other things that must never be silent.
    pub counters: Vec<Counter>,
    /// What the reader must know before using the numbers.
    pub warnings: Vec<String>,
    /// What is approximate and by how much.
    pub approximations: Vec<Approximation>,
}

/// Where the numbers of a run come from.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Provenance {
    /// Name of the study.
    pub study: String,
    /// Title of the study.
    pub title: String,
    /// SHA-256 of the study file and of the files it names, in hexadecimal.
    pub study_checksum: String,
    /// Version of this program.
    pub version: String,
    /// Seed of the random streams.
    pub seed: u64,
    /// Light engine: `profile` or `cascade`.
    pub engine: String,
    /// Column the layouts are ordered by.
    pub score: String,
    /// Number of bootstrap resamples behind tiers and probabilities.
    pub resamples: usize,
    /// Simulated showers and array events by primary: (primary, showers, array events).
    pub simulated: Vec<(String, u64, u64)>,
    /// The published models this run used.
    pub models: Vec<Model>,
}

/// A published model that a run used.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Model {
    /// What it was used for.
    pub purpose: String,
    /// Author, year, journal, page.
    pub citation: String,
}

/// The site in numbers.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct SiteSummary {
    /// Its name.
    pub name: String,
    /// Geodetic latitude, degrees north.
    pub latitude_deg: f64,
    /// Longitude, degrees east.
    pub longitude_deg: f64,
    /// Altitude above the sea, m.
    pub altitude_m: f64,
    /// Vertical depth of air above it, g/cm2.
    pub depth_g_cm2: f64,
    /// Vertical geomagnetic cutoff, GV; zero if the study states no field.
    pub cutoff_gv: f64,
    /// Pointing: zenith angle, degrees.
    pub zenith_deg: f64,
    /// Pointing: azimuth from north through east, degrees.
    pub azimuth_deg: f64,
    /// Boundary polygon, east and north in metres; empty if none.
    pub boundary_enu_m: Vec<[f64; 2]>,
    /// Excluded polygons, east and north in metres.
    pub exclusions_enu_m: Vec<Vec<[f64; 2]>>,
    /// Control house, east and north in metres.
    pub control_house_enu_m: Option<[f64; 2]>,
}

/// One layout of the ranking. A rate that was not computed is NaN and is shown as a dash.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct LayoutRow {
    /// Place in the order, from 1.
    pub rank: usize,
    /// Group that the errors cannot tell apart, from 1.
    pub tier: usize,
    /// Its name.
    pub layout: String,
    /// Number of telescopes.
    pub telescopes: usize,
    /// Telescopes by kind: `4 x broad`.
    pub kinds: String,
    /// Telescopes that must fire.
    pub condition: usize,
    /// Sum of mirror areas, m2.
    pub mirror_area_m2: f64,
    /// Rate of the reference source, Hz.
    pub gamma_rate_hz: f64,
    /// Its standard error, Hz.
    pub gamma_rate_error_hz: f64,
    /// Rate of all backgrounds over the full cone, Hz.
    pub background_rate_hz: f64,
    /// Its standard error, Hz.
    pub background_rate_error_hz: f64,
    /// Peak of the differential gamma trigger rate, GeV.
    pub threshold_gev: f64,
    /// Its standard error, GeV.
    pub threshold_error_gev: f64,
    /// Rate of chance coincidences of the night sky, Hz.
    pub accidental_rate_hz: f64,
    /// Recorded events of the reference source in an hour, dead time taken off.
    pub gamma_rate_per_hour: f64,
    /// Share of the time that the readout is dead; zero if the study states no dead time.
    pub dead_fraction: f64,
    /// Cost in the study's unit.
    pub cost: f64,
    /// Rate of the reference source over cost, Hz; NaN without a cost.
    pub rate_per_cost_hz: f64,
    /// Rate of the reference source over the root of the background's, Hz^(1/2).
    pub rate_per_root_background: f64,
    /// Data of a night, 1e9 bytes.
    pub data_gb_per_night: f64,
    /// Probability that this layout is truly ahead of the next, from paired resampling.
    pub order_probability: f64,
    /// Score, in the unit of the score's column.
    pub score: f64,
    /// Its standard error.
    pub score_error: f64,
}

/// How far the light of a gamma ray reaches across its axis.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct PoolReach {
    /// Energy, GeV.
    pub energy_gev: f64,
    /// Mean density inside 100 m, photons per square metre in the band of the light pool.
    pub inner_photons_m2: f64,
    /// Distance beyond which the density stays under half of that, m.
    pub half_m: f64,
    /// Distance beyond which it stays under a tenth, m.
    pub tenth_m: f64,
}

/// A place of a scan of mirror area and spacing.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct ScanRow {
    /// Name of the family.
    pub family: String,
    /// Mirror area of its telescopes, m2.
    pub mirror_area_m2: f64,
    /// Spacing, m.
    pub spacing_m: f64,
    /// Layout.
    pub layout: String,
    /// Score.
    pub score: f64,
    /// Its standard error.
    pub score_error: f64,
    /// Probability that the family's best is truly ahead; 0 for the best itself.
    pub behind_best: f64,
}

/// A layout in the order of one source.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct SourceRow {
    /// Source.
    pub source: String,
    /// Layout.
    pub layout: String,
    /// Place in the order of this source, from 1.
    pub place: usize,
    /// Group that the errors cannot tell apart, from 1.
    pub tier: usize,
    /// Rate of the source, Hz.
    pub gamma_rate_hz: f64,
    /// Its standard error, Hz.
    pub gamma_rate_error_hz: f64,
    /// Peak of the differential trigger rate, GeV.
    pub threshold_gev: f64,
    /// Its standard error, GeV.
    pub threshold_error_gev: f64,
    /// Probability that it is truly ahead of the next.
    pub order_probability: f64,
    /// How many times as many showers would make that 95 %.
    pub showers_factor: f64,
}

/// A layout's gamma rate under another assumption.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct OrderRow {
    /// What is assumed.
    pub assumption: String,
    /// Layout.
    pub layout: String,
    /// Place in the order by gamma rate, from 1.
    pub place: usize,
    /// Rate of the reference source, Hz.
    pub gamma_rate_hz: f64,
    /// Its standard error, Hz.
    pub gamma_rate_error_hz: f64,
    /// Over the rate as the study states it, on the same showers.
    pub ratio: f64,
    /// Its standard error, paired.
    pub ratio_error: f64,
}

/// What an assumption does to the order by gamma rate.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct OrderChange {
    /// What is assumed.
    pub assumption: String,
    /// Kendall's rank correlation of the two orders.
    pub kendall_tau: f64,
    /// Whether another layout is best.
    pub best_changes: bool,
    /// Pairs that change places, first the one that was ahead.
    pub flips: Vec<String>,
    /// How many of them the errors leave no doubt about: both orders above 95 %.
    pub decided: usize,
}

/// A leading layout with its window applied to single events.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct FinalistRow {
    /// Layout.
    pub layout: String,
    /// Coincidence window, ns.
    pub window_ns: f64,
    /// Gamma rate of the vote, without a window, Hz.
    pub gamma_vote_hz: f64,
    /// With the exact sliding window, Hz.
    pub gamma_window_hz: f64,
    /// And with the help of accidental triggers, Hz.
    pub gamma_with_noise_hz: f64,
    /// Background rate of the vote, Hz.
    pub background_vote_hz: f64,
    /// With the exact sliding window, Hz.
    pub background_window_hz: f64,
    /// And with the help of accidental triggers, Hz.
    pub background_with_noise_hz: f64,
    /// Probability that a telescope is up.
    pub up_probability: f64,
    /// Gamma rate expected when each telescope is up with that probability, Hz.
    pub gamma_expected_hz: f64,
}

/// Direction resolution in a bin of true energy.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct DirectionRow {
    /// Layout.
    pub layout: String,
    /// Lower edge, GeV.
    pub energy_low_gev: f64,
    /// Upper edge, GeV.
    pub energy_high_gev: f64,
    /// Angle within which 68 % of the directions lie, deg; NaN for fewer than 20 events.
    pub containment_68_deg: f64,
    /// Its standard error, deg.
    pub error_deg: f64,
    /// Events with a direction.
    pub events: usize,
    /// Triggered events.
    pub triggered: usize,
}

/// Trigger rate of one primary in one layout.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct PrimaryRow {
    /// Layout.
    pub layout: String,
    /// Primary.
    pub primary: String,
    /// Rate, Hz.
    pub rate_hz: f64,
    /// Its standard error, Hz.
    pub rate_error_hz: f64,
    /// Energy at which the differential rate peaks, GeV.
    pub peak_energy_gev: f64,
    /// Its standard error, GeV.
    pub peak_energy_error_gev: f64,
}

/// An effective area in one bin of true energy.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct AreaRow {
    /// Layout.
    pub layout: String,
    /// Primary.
    pub primary: String,
    /// Lower edge, GeV.
    pub energy_low_gev: f64,
    /// Upper edge, GeV.
    pub energy_high_gev: f64,
    /// Effective area, m2 (for a background over a cone: the acceptance divided by the cone's
    /// solid angle).
    pub area_m2: f64,
    /// Its standard error, m2.
    pub error_m2: f64,
}

/// A differential trigger rate in one bin of true energy.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct RateRow {
    /// Layout.
    pub layout: String,
    /// Primary or source.
    pub primary: String,
    /// Lower edge, GeV.
    pub energy_low_gev: f64,
    /// Upper edge, GeV.
    pub energy_high_gev: f64,
    /// Rate per unit energy, Hz/GeV.
    pub rate_hz_gev: f64,
    /// Its standard error, Hz/GeV.
    pub error_hz_gev: f64,
}

/// Mean Cherenkov light at one distance from the shower axis.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct PoolRow {
    /// Primary.
    pub primary: String,
    /// Its energy, GeV.
    pub energy_gev: f64,
    /// Distance from the axis in the plane across it, m.
    pub distance_m: f64,
    /// Photons per square metre in the stated band.
    pub photons_m2: f64,
    /// Standard error of the mean, photons per square metre.
    pub error_m2: f64,
    /// Shower-to-shower standard deviation, photons per square metre.
    pub spread_m2: f64,
    /// Telescope kind whose photoelectrons are given beside; empty if none.
    pub kind: String,
    /// Mean photoelectrons in that kind's camera.
    pub photoelectrons: f64,
}

/// A telescope kind under this sky.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct KindRow {
    /// Its name.
    pub kind: String,
    /// Mirror area left after obscuration, m2.
    pub mirror_area_m2: f64,
    /// Number of pixels.
    pub pixels: usize,
    /// Pixel pitch on the sky, degrees.
    pub pixel_pitch_deg: f64,
    /// Field of view, full angle, degrees.
    pub field_of_view_deg: f64,
    /// Night-sky photoelectrons per pixel and nanosecond.
    pub sky_pe_per_ns: f64,
    /// Pixel threshold, photoelectrons.
    pub threshold_pe: f64,
    /// How the threshold came about: `fixed` or `lowest quiet`.
    pub threshold_choice: String,
    /// Trigger of the night sky alone in one telescope, Hz.
    pub accidental_rate_hz: f64,
    /// Trigger topology in words.
    pub topology: String,
}

/// The best layout of one number of telescopes that a search found.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct FoundRow {
    /// Number of telescopes.
    pub telescopes: usize,
    /// Cost in the study's unit.
    pub cost: f64,
    /// Rate on the showers that were searched, Hz: optimistic.
    pub searched_rate_hz: f64,
    /// Rate on showers that the search did not see, Hz.
    pub gamma_rate_hz: f64,
    /// Whether no cheaper one of these has a higher rate.
    pub on_front: bool,
}

/// One telescope of a found layout, in the order of building.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct StageRow {
    /// Number of telescopes of the layout.
    pub telescopes: usize,
    /// Place in the order, from 1.
    pub stage: usize,
    /// Kind.
    pub kind: String,
    /// East, north, up, m.
    pub position_m: [f64; 3],
    /// Rate with it and all before it, Hz.
    pub gamma_rate_hz: f64,
    /// Share of the whole layout's rate that is lost when it is out.
    pub loss_if_out: f64,
}

/// The positions of a layout.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct LayoutMap {
    /// Layout.
    pub layout: String,
    /// Its telescopes.
    pub telescopes: Vec<PlacedTelescope>,
}

/// One telescope of a layout.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct PlacedTelescope {
    /// Kind.
    pub kind: String,
    /// Mirror area, m2.
    pub mirror_area_m2: f64,
    /// East, m.
    pub east_m: f64,
    /// North, m.
    pub north_m: f64,
    /// Up, m.
    pub up_m: f64,
}

/// A counted event that a reader should know of.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Counter {
    /// What is counted.
    pub name: String,
    /// How often it happened.
    pub count: u64,
    /// Out of how many.
    pub of: u64,
}

/// An approximation and its size.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Approximation {
    /// What is approximate.
    pub what: String,
    /// By how much, and how that is known.
    pub size: String,
}
