//! The leading layouts event by event: exact coincidence windows, accidental help, directions.

use crate::layout::at_least;
use crate::layout::axes::{ImageAxis, containment, direction_deg};
use crate::layout::coincidence::Window;
use crate::rates::{self, EnergyBin, Estimate};
use crate::report::{DirectionRow, FinalistRow};
use crate::response::EVENTS_PER_WORD;

use super::{Planned, Scored, Weighted, setup};

/// Layouts that are looked at event by event.
const MOST: usize = 6;
/// Energy bins of directions.
const BINS_PER_DECADE: usize = 2;
/// Images with more of their light than this in the camera's outermost pixels have no axis worth
/// the name. Common practice, no source.
const MOST_AT_EDGE: f32 = 0.3;
/// Fewest events of a bin with a direction.
const LEAST_EVENTS: usize = 20;
/// Parts of a sample, from whose scatter the error of a containment comes.
const PARTS: usize = 8;

/// Rates of the leading layouts with the array's window applied to single events.
pub fn rows(planned: &Planned<'_>, scored: &[Scored], order: &[usize]) -> Vec<FinalistRow> {
    let row = |&layout: &usize| {
        let view = View::new(planned, layout);
        let gamma = view.coincidences(&planned.gamma);
        let mut background = Coincident::default();
        for weighted in &planned.backgrounds {
            background.add(view.coincidences(weighted));
        }
        FinalistRow {
            layout: planned.study.layouts[layout].name.clone(),
            window_ns: planned.study.layouts[layout].window_ns,
            gamma_vote_hz: scored[layout].gamma.value,
            gamma_window_hz: gamma.window_hz,
            gamma_with_noise_hz: gamma.with_noise_hz,
            background_vote_hz: scored[layout].background().value,
            background_window_hz: background.window_hz,
            background_with_noise_hz: background.with_noise_hz,
            up_probability: planned.study.ranking.up_probability,
            gamma_expected_hz: view.expected_hz(planned.study.ranking.up_probability),
        }
    };
    order.iter().take(MOST).map(row).collect()
}

/// Direction resolution of the leading layouts by energy.
pub fn directions(planned: &Planned<'_>, scored: &[Scored], order: &[usize]) -> Vec<DirectionRow> {
    let rows = order.iter().take(MOST).map(|&layout| {
        View::new(planned, layout).directions(planned, layout, &scored[layout].gamma_plane)
    });
    rows.flatten().collect()
}

#[derive(Clone, Copy, Default)]
struct Coincident {
    window_hz: f64,
    with_noise_hz: f64,
}

impl Coincident {
    fn add(&mut self, other: Self) {
        self.window_hz += other.window_hz;
        self.with_noise_hz += other.with_noise_hz;
    }
}

/// One layout's columns, thresholds and window.
struct View<'a> {
    planned: &'a Planned<'a>,
    members: &'a [usize],
    thresholds_pe: Vec<f64>,
    /// What the plane front needs to each pad after the reference point, ns.
    front_ns: Vec<f64>,
    window: Window,
}

impl<'a> View<'a> {
    fn new(planned: &'a Planned<'a>, layout: usize) -> Self {
        let members = planned.members[layout].as_slice();
        let kind = |column: &usize| planned.columns[*column].kind;
        let thresholds_pe = &planned.thresholds_pe[layout];
        let noise_hz = members.iter().map(|c| planned.accidental_hz(layout, kind(c))).collect();
        let columns = members.iter().map(|&column| &planned.columns[column]);
        let front_ns = setup::front_ns(planned.study, columns);
        let layout = &planned.study.layouts[layout];
        Self {
            planned,
            members,
            thresholds_pe: members.iter().map(|c| thresholds_pe[kind(c)]).collect(),
            front_ns,
            window: Window { least: layout.condition, length_ns: layout.window_ns, noise_hz },
        }
    }

    fn planes(&self, weighted: &Weighted) -> Vec<Vec<u64>> {
        let columns = self.members.iter().zip(&self.thresholds_pe);
        columns.map(|(&column, &threshold)| weighted.sample.plane(column, threshold)).collect()
    }

    fn coincidences(&self, weighted: &Weighted) -> Coincident {
        let (planes, sample) = (self.planes(weighted), &weighted.sample);
        let rates = rates::event_rates(&sample.words, &weighted.spectrum);
        let (mut sums, mut fired) = (Coincident::default(), Vec::new());
        for (word, rate) in rates.iter().enumerate() {
            let mut any = planes.iter().fold(0, |any, plane| any | plane[word]);
            while any != 0 {
                let bit = any.trailing_zeros() as usize;
                any &= any - 1;
                fired.clear();
                for (member, plane) in planes.iter().enumerate() {
                    if plane[word] >> bit & 1 == 1 {
                        // Below the floor of stored images: as if on the plane front.
                        let event = word * EVENTS_PER_WORD + bit;
                        let image = sample.image(self.members[member], event);
                        let time = image.map_or(0.0, |image| f64::from(image.time_ns));
                        fired.push((time - self.front_ns[member], member));
                    }
                }
                let outcome = self.window.outcome(&mut fired);
                sums.window_hz += if outcome.coincident { *rate } else { 0.0 };
                sums.with_noise_hz += outcome.with_noise * rate;
            }
        }
        sums
    }

    /// Rate when each telescope is up with a probability, independently: the sum over all sets of
    /// telescopes. NaN for more than 12 telescopes, over 4,096 sets.
    fn expected_hz(&self, up: f64) -> f64 {
        let (planes, count) = (self.planes(&self.planned.gamma), self.members.len());
        if count > 12 {
            return f64::NAN;
        }
        let rates =
            rates::event_rates(&self.planned.gamma.sample.words, &self.planned.gamma.spectrum);
        let of_set = |set: u32| {
            let there = (0..count).filter(|member| set >> member & 1 == 1);
            let standing: Vec<&[u64]> = there.map(|member| planes[member].as_slice()).collect();
            let weight =
                up.powi(standing.len() as i32) * (1.0 - up).powi((count - standing.len()) as i32);
            if weight == 0.0 || standing.len() < self.window.least {
                return 0.0;
            }
            weight * rates::rate_sum_hz(&at_least(&standing, self.window.least), &rates)
        };
        (0..1_u32 << count).map(of_set).sum()
    }

    fn directions(&self, planned: &Planned<'_>, layout: usize, plane: &[u64]) -> Vec<DirectionRow> {
        let weighted = &planned.gamma;
        let rates = rates::event_rates(&weighted.sample.words, &weighted.spectrum);
        let (low, high) = weighted.sample.throw.energy_gev;
        let bins = EnergyBin::cover(low, high, BINS_PER_DECADE);
        let planes = self.planes(weighted);
        let row = |bin: &EnergyBin| {
            // Distance from the truth, weight, and part of the sample, of each event.
            let (mut found, mut kept) = (Vec::new(), 0_usize);
            let words = weighted.sample.words.iter().enumerate();
            let inside = words
                .filter(|(_, thrown)| (bin.low_gev..bin.high_gev).contains(&thrown.energy_gev));
            for (number, (word, _)) in inside.enumerate() {
                let mut bits = plane[word];
                while bits != 0 {
                    let bit = bits.trailing_zeros() as usize;
                    bits &= bits - 1;
                    kept += 1;
                    let distance = self.offset_deg(&planes, weighted, word, bit);
                    found.extend(distance.map(|distance| (distance, rates[word], number % PARTS)));
                }
            }
            let estimate = contained(&found);
            DirectionRow {
                layout: planned.study.layouts[layout].name.clone(),
                energy_low_gev: bin.low_gev.max(low),
                energy_high_gev: bin.high_gev.min(high),
                containment_68_deg: estimate.value,
                error_deg: estimate.error,
                events: found.len(),
                triggered: kept,
            }
        };
        bins.iter().map(row).collect()
    }

    /// Distance of the direction found from the true one, which is the pointing.
    fn offset_deg(
        &self,
        planes: &[Vec<u64>],
        weighted: &Weighted,
        word: usize,
        bit: usize,
    ) -> Option<f64> {
        let fired = planes.iter().enumerate().filter(|(_, plane)| plane[word] >> bit & 1 == 1);
        let event = word * EVENTS_PER_WORD + bit;
        let images = fired.filter_map(|(member, _)| {
            let summary = weighted.sample.image(self.members[member], event)?.summary;
            (summary.edge_fraction < MOST_AT_EDGE && summary.length_deg > 0.0).then(|| ImageAxis {
                centroid_deg: summary.centroid_deg.map(f64::from),
                orientation_rad: f64::from(summary.orientation_rad),
                size_pe: f64::from(summary.size_pe),
            })
        });
        let [x, y] = direction_deg(&images.collect::<Vec<_>>())?;
        Some(x.hypot(y))
    }
}

/// 68 % containment, with its error from the scatter of parts of the sample.
fn contained(found: &[(f64, f64, usize)]) -> Estimate {
    let of = |part: Option<usize>| {
        let chosen = found.iter().filter(|(_, _, of)| part.is_none_or(|part| *of == part));
        containment(chosen.map(|&(distance, weight, _)| (distance, weight)).collect(), 0.68)
    };
    let parts: Vec<f64> = (0..PARTS).filter_map(|part| of(Some(part))).collect();
    let value = of(None).filter(|_| found.len() >= LEAST_EVENTS && parts.len() == PARTS);
    let Some(value) = value else { return Estimate { value: f64::NAN, error: f64::NAN } };
    let mean = parts.iter().sum::<f64>() / PARTS as f64;
    let square: f64 = parts.iter().map(|part| (part - mean).powi(2)).sum();
    let error = (square / (PARTS * (PARTS - 1)) as f64).sqrt();
    Estimate { value, error }
}
