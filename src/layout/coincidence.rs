//! The array's coincidence on single events: exact windows, and help from the night sky.

/// When an array triggers in time.
#[derive(Clone, Debug, PartialEq)]
pub struct Window {
    /// Telescopes that must fire.
    pub least: usize,
    /// Within this time of each other, ns.
    pub length_ns: f64,
    /// Accidental trigger rate of each telescope, Hz.
    pub noise_hz: Vec<f64>,
}

/// How an event fares.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Outcome {
    /// Whether the shower alone fires enough telescopes within the window.
    pub coincident: bool,
    /// Probability that it triggers with the help of accidental triggers; 1 if it needs none.
    pub with_noise: f64,
}

impl Window {
    /// The outcome of an event in which some telescopes fire, each at its time in ns (plane-front
    /// delays taken off, as an array's delay lines do).
    ///
    /// Exact for the shower: a window slides over the times. Where it lacks q telescopes, the
    /// largest group within the window, of span s, is completed if at least q of the other
    /// telescopes fire by accident within 2 length - s: P = 1 - sum over n < q of the Poisson
    /// probability of mean (sum of their rates) x (2 length - s).
    ///
    /// # Validity
    /// For q = 1 exact to first order in rate x length; for q > 1 an upper bound, since accidental
    /// triggers must also lie within the window of each other.
    ///
    /// # Source
    /// Poisson coincidences after Eckart & Shonka 1938, Phys. Rev. 53, 752. Test:
    /// `verify_windows_and_noise_are_those_of_a_brute_force_count`.
    pub fn outcome(&self, fired: &mut [(f64, usize)]) -> Outcome {
        fired.sort_by(|a, b| a.0.total_cmp(&b.0));
        let (mut group, mut last) = (0..0, 0);
        for first in 0..fired.len() {
            while last < fired.len() && fired[last].0 - fired[first].0 <= self.length_ns {
                last += 1;
            }
            if last - first > group.len() {
                group = first..last;
            }
        }
        if group.len() >= self.least {
            return Outcome { coincident: true, with_noise: 1.0 };
        }
        if group.is_empty() {
            return Outcome { coincident: false, with_noise: 0.0 };
        }
        let members = &fired[group.clone()];
        let span = members[members.len() - 1].0 - members[0].0;
        let all: f64 = self.noise_hz.iter().sum();
        let own: f64 = members.iter().map(|(_, member)| self.noise_hz[*member]).sum();
        let mean = (all - own).max(0.0) * (2.0 * self.length_ns - span) * 1e-9;
        Outcome { coincident: false, with_noise: at_least(self.least - group.len(), mean) }
    }
}

/// Probability of at least `least` events of a Poisson mean; summed upward, without the loss of
/// 1 - (1 - small).
fn at_least(least: usize, mean: f64) -> f64 {
    let mut term = (-mean).exp();
    for number in 1..=least {
        term *= mean / number as f64;
    }
    let (mut sum, mut number) = (0.0, least);
    while term > 1e-18 * sum && term > 0.0 {
        sum += term;
        number += 1;
        term *= mean / number as f64;
    }
    sum
}
