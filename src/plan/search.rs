//! A study's ground as pads, simulated once, for a search over sets of them.

use std::sync::atomic::{AtomicBool, Ordering};

use thiserror::Error;

use crate::layout::generator::Pattern;
use crate::layout::stages::{build_up, front, losses};
use crate::layout::{Condition, Found, LayoutError, Objective, Planes, Problem, Settings, search};
use crate::rates;
use crate::report::{self, FoundRow, Provenance, ReportError, StageRow};
use crate::study::{Layout, Placed, Study};
use crate::telescope::Threshold;

use super::{PlanError, Progress, Tables, Weighted, setup, simulate};

/// What to search for.
#[derive(Clone, Debug, PartialEq)]
pub struct Wanted {
    /// Most telescopes.
    pub telescopes: usize,
    /// Most that a layout may cost, in the unit of the kinds' costs.
    pub budget: Option<f64>,
    /// Distance of neighbouring pads, m.
    pub pad_spacing_m: f64,
    /// Telescopes that must fire.
    pub condition: usize,
}

/// A search that cannot be done.
#[derive(Debug, Error)]
pub enum SearchError {
    /// The study cannot be simulated.
    #[error(transparent)]
    Plan(#[from] PlanError),
    /// No layout is possible.
    #[error(transparent)]
    Layout(#[from] LayoutError),
    /// The study has no ground to search.
    #[error("[site] boundary_enu_m: missing: a search needs the outline of the ground")]
    NoBoundary,
    /// A threshold that depends on the layout.
    #[error(
        "{kind}: threshold = \"quiet\" depends on the layout that is searched for; write \
         threshold_pe or quiet_rate_hz"
    )]
    NoLayout {
        /// The telescope kind.
        kind: String,
    },
    /// Not enough pads.
    #[error("{pads} pads {spacing_m} m apart fit the boundary; at least {least} are needed")]
    FewPads {
        /// Pads inside.
        pads: usize,
        /// Their spacing.
        spacing_m: f64,
        /// Pads needed.
        least: usize,
    },
}

/// The best layout of one number of telescopes.
#[derive(Clone, Debug, PartialEq)]
pub struct Best {
    /// Its telescopes.
    pub telescopes: Vec<Placed>,
    /// Rate on the half of the showers that was searched, Hz: optimistic.
    pub searched_hz: f64,
    /// Rate on the other half, Hz.
    pub reported_hz: f64,
    /// Cost by the study's prices; what stands already is free.
    pub cost: f64,
    /// Whether no cheaper one of these has a higher rate.
    pub on_front: bool,
    /// Place of each telescope in the build-up and the rate with it and all before it, Hz.
    pub build_up: Vec<(Placed, f64)>,
    /// Share of the rate lost when each telescope is out, in the order of `telescopes`.
    pub losses: Vec<f64>,
}

impl Best {
    /// As a row of the table of found layouts.
    pub fn row(&self) -> FoundRow {
        FoundRow {
            telescopes: self.telescopes.len(),
            cost: self.cost,
            searched_rate_hz: self.searched_hz,
            gamma_rate_hz: self.reported_hz,
            on_front: self.on_front,
        }
    }

    /// Its telescopes in the order of building.
    pub fn stages(&self, study: &Study) -> Vec<StageRow> {
        let row = |(index, (placed, rate)): (usize, &(Placed, f64))| {
            let place = self.telescopes.iter().position(|telescope| telescope == placed);
            StageRow {
                telescopes: self.telescopes.len(),
                stage: index + 1,
                kind: study.kinds[placed.kind].name.clone(),
                position_m: placed.enu_m,
                gamma_rate_hz: *rate,
                loss_if_out: place.map_or(f64::NAN, |place| self.losses[place]),
            }
        };
        self.build_up.iter().enumerate().map(row).collect()
    }
}

/// The files of a search: `front` and `build_up`, as CSV and Parquet.
///
/// # Errors
/// [`ReportError::Table`].
pub fn best_files(best: &[Best], study: &Study) -> Result<Vec<(String, Vec<u8>)>, ReportError> {
    let found: Vec<FoundRow> = best.iter().map(Best::row).collect();
    let stages: Vec<StageRow> = best.iter().flat_map(|best| best.stages(study)).collect();
    let from = Provenance {
        study: study.name.clone(),
        study_checksum: study.checksum.clone(),
        version: env!("CARGO_PKG_VERSION").into(),
        seed: study.seed,
        engine: study.engine.name().into(),
        ..Provenance::default()
    };
    report::found_files(&found, &stages, &from)
}

/// Searches the ground of a study: the best layouts of each number of telescopes up to the wanted,
/// by gamma trigger rate, from half of the showers, with rates from the other half.
///
/// `searching` is called when the simulation is done; setting `stop` from then on ends the search
/// soon, with the best so far of the numbers of telescopes that were reached.
///
/// # Errors
/// [`SearchError`].
pub fn search_ground(
    study: &Study,
    wanted: &Wanted,
    tables: Option<&Tables>,
    (stop, searching): (&AtomicBool, &dyn Fn()),
    progress: &dyn Progress,
) -> Result<Vec<Best>, SearchError> {
    if let Some(kind) = study.kinds.iter().find(|kind| kind.threshold == Threshold::Quiet) {
        return Err(SearchError::NoLayout { kind: kind.name.clone() });
    }
    let pads = pads(study, wanted)?;
    let mut ground = study.clone();
    ground.layouts = vec![pads];
    ground.backgrounds.clear();
    let spectra = setup::spectra(&ground).map_err(PlanError::from)?;
    progress.stage("light tables", 1);
    let light = setup::light_model(&ground);
    progress.advance(1);
    let planned = simulate(&ground, &light, spectra, tables, progress)?;
    let planes =
        planes(&planned.gamma, |column| planned.thresholds_pe[0][planned.columns[column].kind]);
    let problem = |parity: u32| Problem {
        positions_m: planned.columns.iter().map(|column| column.position_m).collect(),
        kinds: planned.columns.iter().map(|column| column.kind).collect(),
        gamma: planes.half(parity),
        backgrounds: Vec::new(),
        condition: Condition::any(wanted.condition),
        objective: Objective::GammaRate { spectrum: 0 },
        tariff: study.tariff.clone(),
        least_distance_m: 0.5 * wanted.pad_spacing_m,
        budget: wanted.budget,
    };
    let (searched, reported) = (problem(0), problem(1));
    searching();
    progress.stage("search", wanted.telescopes as u64);
    let mut best = Vec::new();
    let is_built = |column: &usize| {
        let column = &planned.columns[*column];
        study.built.iter().any(|b| b.kind == column.kind && b.enu_m == column.position_m)
    };
    let fixed: Vec<usize> = (0..planned.columns.len()).filter(is_built).collect();
    for telescopes in wanted.condition.max(fixed.len())..=wanted.telescopes {
        let settings = Settings {
            telescopes,
            fixed: fixed.clone(),
            restarts: 16,
            steps: 40_000,
            seed: study.seed,
        };
        match search(&searched, &settings, stop) {
            Ok(found) => best.push(described(&found[0], &fixed, &searched, &reported)),
            // More telescopes than the budget allows: the smaller layouts stand.
            Err(LayoutError::Impossible { .. }) if !best.is_empty() => break,
            Err(error) => return Err(error.into()),
        }
        progress.advance(1);
        if stop.load(Ordering::Relaxed) {
            break;
        }
    }
    let points: Vec<(f64, f64)> = best.iter().map(|b| (b.reported_hz, b.cost)).collect();
    for index in front(&points) {
        best[index].on_front = true;
    }
    Ok(best)
}

/// Every kind on every point of a triangular grid on allowed ground, as one layout.
fn pads(study: &Study, wanted: &Wanted) -> Result<Layout, SearchError> {
    let boundary = &study.site.boundary_enu_m;
    if boundary.is_empty() {
        return Err(SearchError::NoBoundary);
    }
    let spacing_m = wanted.pad_spacing_m;
    let reach = boundary.iter().map(|p| p[0].hypot(p[1])).fold(0.0, f64::max) / spacing_m;
    // Area of the disc over that of a cell, and a rim.
    let count = (core::f64::consts::PI * (reach + 2.0).powi(2) / 0.75_f64.sqrt()).ceil() as usize;
    let constraints = study.site.constraints();
    let free = |point: &[f64; 2]| constraints.ground(*point).is_ok();
    let grid = Pattern::Triangular.positions_m(count, spacing_m);
    let points: Vec<[f64; 2]> = grid.into_iter().filter(free).collect();
    let least = wanted.telescopes.max(2);
    if points.len() < least {
        return Err(SearchError::FewPads { pads: points.len(), spacing_m, least });
    }
    let on_pad = |p: &[f64; 2]| {
        let enu_m = [p[0], p[1], 0.0];
        (0..study.kinds.len()).map(move |kind| Placed { kind, enu_m })
    };
    Ok(Layout {
        name: "pads".into(),
        telescopes: study.built.iter().cloned().chain(points.iter().flat_map(on_pad)).collect(),
        condition: wanted.condition,
        window_ns: study.layouts.first().map_or(50.0, |layout| layout.window_ns),
        scan: None,
        line: 0,
    })
}

/// Bit planes of all columns; words are numbered within their ring, so that the halves of a table
/// hold alternate energies of every ring.
fn planes(gamma: &Weighted, threshold_pe: impl Fn(usize) -> f64) -> Planes {
    let sample = &gamma.sample;
    // Alternate within a ring, and from repetition to repetition, so that either half holds every
    // energy.
    let (rings, once) = (sample.throw.rings_m.len(), sample.throw.word_count());
    let number = |word: usize| (word / rings + (word / once) * (1 + once / rings % 2)) as u32;
    Planes {
        columns: (0..sample.pads.len()).map(|c| sample.plane(c, threshold_pe(c))).collect(),
        weights: vec![rates::event_rates(&sample.words, &gamma.spectrum)],
        showers: (0..sample.words.len()).map(number).collect(),
    }
}

fn described(found: &Found, fixed: &[usize], searched: &Problem, reported: &Problem) -> Best {
    let placed = |column: usize| Placed {
        kind: searched.kinds[column],
        enu_m: searched.positions_m[column],
    };
    Best {
        telescopes: found.members.iter().map(|&column| placed(column)).collect(),
        searched_hz: found.score,
        reported_hz: reported.score(&found.members),
        cost: searched.cost(&found.members),
        on_front: false,
        build_up: build_up(reported, &found.members, fixed)
            .into_iter()
            .map(|(column, rate)| (placed(column), rate))
            .collect(),
        losses: losses(reported, &found.members),
    }
}
