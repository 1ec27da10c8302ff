//! The plain result of a plan, row by row.

use crate::layout::{Compared, Comparison};
use crate::light::LightModel;
use crate::rates::{
    EnergyBin, Estimate, angle_rates_hz, beyond_fraction, dead_fraction, differential_rates,
    effective_areas, event_rates, threshold_gev,
};
use crate::report::{
    AreaRow, Counter, KindRow, LayoutMap, LayoutRow, PlacedTelescope, PlanResult, PoolRow,
    PrimaryRow, Provenance, RateRow, ScanRow, SiteSummary,
};
use crate::telescope::{Threshold, accidental};

use super::{Planned, Scored, Weighted, models, setup};

const BINS_PER_DECADE: usize = 5;

pub fn result(
    planned: &Planned<'_>,
    light: &LightModel,
    scored: &[Scored],
    ranked: &[Compared],
    light_pool: Vec<PoolRow>,
) -> PlanResult {
    let mut effective_areas = Vec::new();
    let mut differential_rates = Vec::new();
    for place in ranked {
        let layout = &scored[place.layout];
        let name = &planned.study.layouts[place.layout].name;
        let gamma = (&planned.gamma, &layout.gamma_plane);
        let backgrounds = planned.backgrounds.iter().zip(&layout.backgrounds);
        let all = [gamma]
            .into_iter()
            .chain(backgrounds.map(|(weighted, (plane, _, _))| (weighted, plane)));
        for (weighted, plane) in all {
            energy_rows(name, weighted, plane, &mut effective_areas, &mut differential_rates);
        }
    }
    PlanResult {
        provenance: provenance(planned),
        site: site(planned, light),
        ranking: ranked
            .iter()
            .enumerate()
            .map(|(rank, place)| layout_row(planned, &scored[place.layout], rank, place))
            .collect(),
        primaries: primaries(planned, scored, ranked),
        effective_areas,
        differential_rates,
        light_pool,
        kinds: kinds(planned, ranked),
        maps: ranked.iter().map(|place| map(planned, place.layout)).collect(),
        counters: counters(planned),
        warnings: warnings(planned, scored, ranked),
        approximations: models::approximations(planned.study),
        ..PlanResult::default()
    }
}

fn layout_row(planned: &Planned<'_>, scored: &Scored, rank: usize, place: &Compared) -> LayoutRow {
    let layout = &planned.study.layouts[place.layout];
    let kinds = &planned.study.kinds;
    let of_kind = |kind: usize| layout.telescopes.iter().filter(|t| t.kind == kind).count();
    let names: Vec<String> = (0..kinds.len())
        .filter(|&kind| of_kind(kind) > 0)
        .map(|kind| format!("{} x {}", of_kind(kind), kinds[kind].name))
        .collect();
    let background = scored.background();
    let threshold = threshold_gev(&planned.gamma.sample.words, &scored.gamma_words);
    let accidental_rate_hz = planned.array_accidental_hz(place.layout);
    let cost = planned.cost(place.layout);
    let pixels: usize = layout.telescopes.iter().map(|t| kinds[t.kind].camera.pixels.len()).sum();
    let recording = planned.study.recording;
    let event_bytes = pixels as f64 * recording.bytes_per_pixel;
    let all_hz = scored.gamma.value + background.value + accidental_rate_hz;
    let dead = dead_fraction(all_hz, 1e-6 * planned.study.dead_time_us);
    LayoutRow {
        rank: rank + 1,
        tier: place.tier,
        layout: layout.name.clone(),
        telescopes: layout.telescopes.len(),
        kinds: names.join(" + "),
        condition: layout.condition,
        mirror_area_m2: layout.telescopes.iter().map(|t| kinds[t.kind].mirror_area_m2).sum(),
        gamma_rate_hz: scored.gamma.value,
        gamma_rate_error_hz: scored.gamma.error,
        background_rate_hz: background.value,
        background_rate_error_hz: background.error,
        threshold_gev: threshold.value,
        threshold_error_gev: threshold.error,
        accidental_rate_hz,
        gamma_rate_per_hour: 3_600.0 * scored.gamma.value * (1.0 - dead),
        dead_fraction: dead,
        cost,
        rate_per_cost_hz: if cost > 0.0 { scored.gamma.value / cost } else { f64::NAN },
        rate_per_root_background: scored.gamma.value / background.value.sqrt(),
        data_gb_per_night: all_hz * event_bytes * recording.hours_per_night * 3_600.0 * 1e-9,
        order_probability: place.order_probability,
        score: place.score,
        score_error: place.error,
    }
}

/// Scores of the layouts that are places of a scan of mirror area and spacing.
pub fn scans(planned: &Planned<'_>, scores: &Comparison, ranked: &[Compared]) -> Vec<ScanRow> {
    let found = |layout: usize| planned.study.layouts[layout].scan.as_ref();
    let row = |place: &Compared| {
        let scan = found(place.layout)?;
        // The best of the family: the first of it in the order.
        let same = |other: &&Compared| found(other.layout).is_some_and(|s| s.family == scan.family);
        let best = ranked.iter().find(same)?.layout;
        Some(ScanRow {
            family: scan.family.clone(),
            mirror_area_m2: scan.mirror_area_m2,
            spacing_m: scan.spacing_m,
            layout: planned.study.layouts[place.layout].name.clone(),
            score: place.score,
            score_error: place.error,
            behind_best: if best == place.layout {
                0.0
            } else {
                scores.probability_ahead(best, place.layout)
            },
        })
    };
    ranked.iter().filter_map(row).collect()
}

/// Rate and peak energy of each primary in each layout.
fn primaries(planned: &Planned<'_>, scored: &[Scored], ranked: &[Compared]) -> Vec<PrimaryRow> {
    let mut rows = Vec::new();
    for place in ranked {
        let layout = &scored[place.layout];
        let name = &planned.study.layouts[place.layout].name;
        let mut row = |weighted: &Weighted, words: &[f64], rate: Estimate| {
            let peak = threshold_gev(&weighted.sample.words, words);
            rows.push(PrimaryRow {
                layout: name.clone(),
                primary: weighted.sample.species.to_string(),
                rate_hz: rate.value,
                rate_error_hz: rate.error,
                peak_energy_gev: peak.value,
                peak_energy_error_gev: peak.error,
            });
        };
        row(&planned.gamma, &layout.gamma_words, layout.gamma);
        for (weighted, (_, words, rate)) in planned.backgrounds.iter().zip(&layout.backgrounds) {
            row(weighted, words, *rate);
        }
    }
    rows
}

fn energy_rows(
    layout: &str,
    weighted: &Weighted,
    plane: &[u64],
    areas: &mut Vec<AreaRow>,
    densities: &mut Vec<RateRow>,
) {
    let throw = &weighted.sample.throw;
    let primary = throw.species.to_string();
    let (lowest, highest) = throw.energy_gev;
    let mut bins = EnergyBin::cover(lowest, highest, BINS_PER_DECADE);
    // The first and last bin end where the throw does.
    for bin in &mut bins {
        bin.low_gev = bin.low_gev.max(lowest);
        bin.high_gev = bin.high_gev.min(highest);
    }
    let (sample, areas_m2) = (&weighted.sample, throw.ring_areas_m2());
    let of_bins = effective_areas(&sample.words, plane, &areas_m2, &bins);
    let reach = (areas_m2.as_slice(), throw.solid_angle_sr());
    let rates = differential_rates(&sample.words, plane, reach, &weighted.spectrum, &bins);
    for ((bin, area), rate) in bins.iter().zip(of_bins).zip(rates) {
        areas.push(AreaRow {
            layout: layout.into(),
            primary: primary.clone(),
            energy_low_gev: bin.low_gev,
            energy_high_gev: bin.high_gev,
            area_m2: area.value,
            error_m2: area.error,
        });
        densities.push(RateRow {
            layout: layout.into(),
            primary: primary.clone(),
            energy_low_gev: bin.low_gev,
            energy_high_gev: bin.high_gev,
            rate_hz_gev: rate.value,
            error_hz_gev: rate.error,
        });
    }
}

fn provenance(planned: &Planned<'_>) -> Provenance {
    let study = planned.study;
    let simulated = [&planned.gamma].into_iter().chain(&planned.backgrounds).map(|weighted| {
        let sample = &weighted.sample;
        let showers = sample.words.len() * crate::response::SHOWERS_PER_WORD;
        (sample.species.to_string(), showers as u64, sample.events() as u64)
    });
    Provenance {
        study: study.name.clone(),
        title: study.title.clone(),
        study_checksum: study.checksum.clone(),
        version: env!("CARGO_PKG_VERSION").into(),
        seed: study.seed,
        engine: study.engine.name().into(),
        score: study.ranking.score.clone(),
        resamples: study.ranking.resamples,
        simulated: simulated.collect(),
        models: models::models(study, &planned.gamma.spectrum, &planned.backgrounds),
    }
}

fn site(planned: &Planned<'_>, light: &LightModel) -> SiteSummary {
    let (site, pointing) = (&planned.study.site, &planned.study.pointing);
    let depth = planned.study.air.atmosphere.depth_g_cm2(light.column.observer_altitude_m);
    SiteSummary {
        name: site.name.clone(),
        latitude_deg: site.latitude_deg,
        longitude_deg: site.longitude_deg,
        altitude_m: site.altitude_m,
        depth_g_cm2: depth,
        cutoff_gv: setup::cutoff_gv(planned.study),
        zenith_deg: pointing.zenith_deg,
        azimuth_deg: pointing.azimuth_deg,
        boundary_enu_m: site.boundary_enu_m.clone(),
        exclusions_enu_m: site.exclusions.iter().map(|e| e.outline_enu_m.clone()).collect(),
        control_house_enu_m: site.control_house_enu_m,
    }
}

fn kinds(planned: &Planned<'_>, ranked: &[Compared]) -> Vec<KindRow> {
    // A quiet threshold is shown as it is in the best layout that has the kind.
    let layout_of = |kind: usize| {
        let has = |layout: usize| {
            planned.study.layouts[layout].telescopes.iter().any(|placed| placed.kind == kind)
        };
        ranked.iter().map(|row| row.layout).find(|&layout| has(layout)).unwrap_or(0)
    };
    let row = |(index, kind): (usize, &crate::telescope::TelescopeKind)| KindRow {
        kind: kind.name.clone(),
        mirror_area_m2: kind.collecting_area_m2(),
        pixels: kind.camera.pixels.len(),
        pixel_pitch_deg: kind.camera.pitch_deg,
        field_of_view_deg: kind.camera.field_of_view_deg,
        sky_pe_per_ns: planned.sky_per_ns[index],
        threshold_pe: planned.thresholds_pe[layout_of(index)][index],
        threshold_choice: match kind.threshold {
            Threshold::FixedPe(_) => "fixed".into(),
            Threshold::QuietHz(rate) => format!("lowest with less than {rate} Hz from the sky"),
            Threshold::Quiet => {
                let name = &planned.study.layouts[layout_of(index)].name;
                format!("lowest quiet of each layout, here of {name}")
            }
        },
        accidental_rate_hz: planned.accidental_hz(layout_of(index), index),
        topology: kind.topology.to_string(),
    };
    planned.study.kinds.iter().enumerate().map(row).collect()
}

fn map(planned: &Planned<'_>, layout: usize) -> LayoutMap {
    let layout = &planned.study.layouts[layout];
    let telescopes = layout.telescopes.iter().map(|placed| {
        let kind = &planned.study.kinds[placed.kind];
        let [east_m, north_m, up_m] = placed.enu_m;
        let (name, mirror_area_m2) = (kind.name.clone(), kind.mirror_area_m2);
        PlacedTelescope { kind: name, mirror_area_m2, east_m, north_m, up_m }
    });
    LayoutMap { layout: layout.name.clone(), telescopes: telescopes.collect() }
}

fn counters(planned: &Planned<'_>) -> Vec<Counter> {
    [&planned.gamma]
        .into_iter()
        .chain(&planned.backgrounds)
        .map(|weighted| Counter {
            name: format!("{} cells without an image", weighted.sample.species),
            count: weighted.sample.dark_cells(),
            of: (weighted.sample.events() * planned.columns.len()) as u64,
        })
        .collect()
}

/// What limits the numbers: light lost at the edges of the throw, and whether the order survives
/// another light scale.
fn warnings(planned: &Planned<'_>, scored: &[Scored], ranked: &[Compared]) -> Vec<String> {
    let mut warnings = Vec::new();
    let Some(best) = ranked.first() else { return warnings };
    let leader = &scored[best.layout];
    for [name, first] in &planned.study.left_out {
        warnings.push(format!("{name} is the same layout as {first} and is left out"));
    }
    let all = [(&planned.gamma, &leader.gamma_plane, leader.gamma)].into_iter().chain(
        planned.backgrounds.iter().zip(&leader.backgrounds).map(|(w, (p, _, e))| (w, p, *e)),
    );
    for (weighted, plane, estimate) in all {
        let (name, throw) = (weighted.sample.species, &weighted.sample.throw);
        warnings.push(planned.reach_note(weighted));
        if throw.cone_rad > 0.0 {
            warnings.push(cone_note(weighted, plane));
        }
        let relative = estimate.error / estimate.value;
        let wanted = planned.study.budget.background_rate_error;
        if throw.cone_rad > 0.0 && relative > wanted {
            warnings.push(format!(
                "{name}: the leading layout's rate is known to {:.1} %, not the {:.1} % asked for; \
                 raise background_showers about {:.1} times",
                100.0 * relative,
                100.0 * wanted,
                (relative / wanted).powi(2)
            ));
        }
    }
    warnings
}

/// What the cone of directions leaves out, by continuing the rate's fall with the angle.
fn cone_note(weighted: &Weighted, plane: &[u64]) -> String {
    const RINGS: usize = 6;
    let sample = &weighted.sample;
    let rates = event_rates(&sample.words, &weighted.spectrum);
    let by_angle = angle_rates_hz(sample, plane, &rates, RINGS);
    let step = sample.throw.cone_rad / RINGS as f64;
    let radii: Vec<f64> = (1..=RINGS).map(|ring| step * ring as f64).collect();
    let (name, degrees) = (sample.species, sample.throw.cone_rad.to_degrees());
    let beyond = beyond_fraction(&radii, &by_angle);
    if !beyond.is_finite() {
        return format!(
            "{name}: directions thrown to {degrees:.1} degrees from the pointing; too few triggers near the \
             edge to say what lies beyond"
        );
    }
    let much = if beyond > 0.02 { "; widen cone_half_angle_deg" } else { "" };
    format!(
        "{name}: directions thrown to {degrees:.1} degrees from the pointing; {:.1} % of the leading \
         layout's rate lies beyond by extrapolation{much}",
        100.0 * beyond
    )
}

impl Planned<'_> {
    /// Accidental coincidences of a layout, Hz.
    pub(super) fn array_accidental_hz(&self, layout: usize) -> f64 {
        let placed = &self.study.layouts[layout];
        let rates = placed.telescopes.iter().map(|t| self.accidental_hz(layout, t.kind));
        let rates: Vec<f64> = rates.collect();
        accidental::array_rate_hz(&rates, placed.condition, placed.window_ns)
    }

    /// Accidental trigger rate of one telescope of a kind at its threshold in a layout, Hz.
    pub(super) fn accidental_hz(&self, layout: usize, kind: usize) -> f64 {
        self.accidental[kind].rate_hz(self.thresholds_pe[layout][kind])
    }
}
