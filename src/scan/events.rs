//! What showers do to the telescopes of one array, event by event.

use crate::layout::coincidence::Window;
use crate::rates::{self, Estimate, Spectrum};
use crate::response::margin::Code;
use crate::response::{EVENTS_PER_WORD, Sample, Word};

/// A telescope with a margin in some event.
#[derive(Clone, Copy, Debug)]
struct Hit {
    member: u16,
    code: Code,
    time_ns: f32,
}

/// An event with at least one margin: its word, and where its hits end.
#[derive(Clone, Copy, Debug)]
struct Event {
    word: u32,
    end: u32,
}

/// Events of one primary, weighted by one spectrum.
#[derive(Clone, Debug)]
struct Set {
    words: Vec<Word>,
    event_rates: Vec<f64>,
    events: Vec<Event>,
    hits: Vec<Hit>,
}

/// Margins and times of an array's telescopes in all events of some primaries, each weighted by its
/// spectrum.
///
/// Times are those of the images less each telescope's delay. A margin too small for a stored image
/// has no time of its own: it takes the mean of the event's others.
#[derive(Clone, Debug, Default)]
pub struct ArrayEvents {
    sets: Vec<Set>,
}

/// Rates of showers: of one telescope by group, and of the array.
pub(super) struct ShowerRates {
    pub telescope: Vec<Estimate>,
    pub array: Estimate,
}

impl ArrayEvents {
    /// Adds a sample: `members` are its columns, `delays_ns` what is taken off their times.
    pub fn insert(
        &mut self,
        sample: &Sample,
        spectrum: &Spectrum,
        members: &[usize],
        delays_ns: &[f64],
    ) {
        let (mut events, mut hits) = (Vec::new(), Vec::new());
        for event in 0..sample.events() {
            let start = hits.len();
            let (mut sum, mut timed) = (0.0, 0.0);
            for (member, (&column, delay_ns)) in members.iter().zip(delays_ns).enumerate() {
                let code = sample.margins[column][event];
                if code == 0 {
                    continue;
                }
                let image = sample.image(column, event);
                let time_ns = image.map_or(f32::NAN, |cell| cell.time_ns - *delay_ns as f32);
                if !time_ns.is_nan() {
                    sum += time_ns;
                    timed += 1.0;
                }
                hits.push(Hit { member: member as u16, code, time_ns });
            }
            if hits.len() == start {
                continue;
            }
            let mean = if timed > 0.0 { sum / timed } else { 0.0 };
            for hit in hits[start..].iter_mut().filter(|hit| hit.time_ns.is_nan()) {
                hit.time_ns = mean;
            }
            let word = (event / EVENTS_PER_WORD) as u32;
            events.push(Event { word, end: hits.len() as u32 });
        }
        let event_rates = rates::event_rates(&sample.words, spectrum);
        self.sets.push(Set { words: sample.words.clone(), event_rates, events, hits });
    }

    /// Rates with the smallest code that fires by member; members of a group are averaged.
    pub(super) fn rates(
        &self,
        least: &[Code],
        groups: &[usize],
        count: usize,
        window: &Window,
    ) -> ShowerRates {
        let mut shares = vec![0.0; count];
        groups.iter().for_each(|&group| shares[group] += 1.0);
        shares.iter_mut().for_each(|members| *members = 1.0 / *members);
        let mut telescope = vec![Estimate::default(); count];
        let mut array = Estimate::default();
        let mut fired = Vec::new();
        for set in &self.sets {
            let mut of_groups = vec![vec![0.0; set.words.len()]; count];
            let mut of_array = vec![0.0; set.words.len()];
            let mut start = 0;
            for event in &set.events {
                let hits = &set.hits[start..event.end as usize];
                start = event.end as usize;
                fired.clear();
                let word = event.word as usize;
                let rate = set.event_rates[word];
                for hit in hits.iter().filter(|hit| hit.code >= least[usize::from(hit.member)]) {
                    let member = usize::from(hit.member);
                    fired.push((f64::from(hit.time_ns), member));
                    of_groups[groups[member]][word] += rate * shares[groups[member]];
                }
                if !fired.is_empty() {
                    of_array[word] += rate * window.outcome(&mut fired).with_noise;
                }
            }
            for (sum, words) in telescope.iter_mut().zip(&of_groups) {
                *sum = added(*sum, rates::rate_hz(&set.words, words));
            }
            array = added(array, rates::rate_hz(&set.words, &of_array));
        }
        ShowerRates { telescope, array }
    }
}

/// The sum of independent estimates.
fn added(a: Estimate, b: Estimate) -> Estimate {
    Estimate { value: a.value + b.value, error: a.error.hypot(b.error) }
}
