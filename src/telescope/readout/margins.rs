//! The trigger margin of an image by each pattern.

use crate::numerics::Stream;

use super::{EMPTY, LIT, RAISED, Readout, pulse_sum};

impl Readout<'_> {
    /// Sorts the touched pixels by height, falling.
    fn ordered(&mut self) -> Vec<u16> {
        let mut order = core::mem::take(&mut self.touched);
        let height = &self.height;
        order.sort_unstable_by(|a, b| {
            height[usize::from(*b)].total_cmp(&height[usize::from(*a)]).then(a.cmp(b))
        });
        order
    }

    /// Raises pixels from the highest down and joins neighbours that peak together, until a group
    /// has enough.
    pub(super) fn connected_margin(&mut self, need: usize) -> f32 {
        let order = self.ordered();
        let kind = self.kind;
        let mut margin = 0.0;
        for &pixel in &order {
            let here = usize::from(pixel);
            self.mark[here] = RAISED;
            self.parent[here] = pixel;
            self.members[here] = 1;
            let mut largest = 1;
            for &neighbour in kind.camera.neighbours(here) {
                let other = usize::from(neighbour);
                if self.mark[other] == RAISED && self.together(here, other) {
                    largest = largest.max(self.join(pixel, neighbour));
                }
            }
            if usize::from(largest) >= need {
                margin = self.height[here].max(0.0);
                break;
            }
        }
        self.touched = order;
        margin
    }

    /// The best of all compact groups whose pixels peak together.
    pub(super) fn compact_margin(&self) -> f32 {
        let mut margin = 0.0_f32;
        for &pixel in &self.touched {
            for &index in &self.groups_of[usize::from(pixel)] {
                let group = &self.groups[index as usize];
                if group[0] != pixel {
                    continue; // Counted from its first pixel.
                }
                let whole = group.iter().all(|&p| self.mark[usize::from(p)] != EMPTY);
                let pairs = || group.iter().flat_map(|a| group.iter().map(move |b| (*a, *b)));
                if whole && pairs().all(|(a, b)| self.together(a.into(), b.into())) {
                    let least = group.iter().map(|&p| self.height[usize::from(p)]);
                    margin = margin.max(least.fold(f32::INFINITY, f32::min));
                }
            }
        }
        margin
    }

    /// The n-th largest of pixels that all peak within one gate, unlit pixels included.
    pub(super) fn majority_margin(
        &mut self,
        need: usize,
        time_ns: f32,
        stream: &mut Stream,
    ) -> f32 {
        self.raised.clear();
        for &pixel in &self.touched {
            let pixel = usize::from(pixel);
            self.raised.push((self.height[pixel], self.peak_ns[pixel]));
        }
        // The highest of m equal laws, then the next below it: share u^(1/m), then u^(1/(m-1)) of
        // that, and so on.
        let mut others = self.kind.camera.pixels.len() - self.touched.len();
        let mut share = 1.0_f64;
        let most = 2 * need;
        for _ in 0..most.min(others) {
            share *= stream.uniform_positive().powf(1.0 / others as f64);
            let height = self.maxima.quantile(share);
            let time = self.noise_time(time_ns, stream);
            self.raised.push((height, time));
            others -= 1;
        }
        self.raised.sort_unstable_by(|a, b| b.0.total_cmp(&a.0).then(a.1.total_cmp(&b.1)));
        let gate = self.kind.coincidence_gate_ns as f32;
        for place in 0..self.raised.len() {
            let (height, last) = self.raised[place];
            let seen = &self.raised[..=place];
            // Every window that holds the new time begins at the time of one of its pixels.
            let full = seen.iter().any(|&(_, start)| {
                let inside = |time: f32| (start..=start + gate).contains(&time);
                inside(last) && seen.iter().filter(|(_, time)| inside(*time)).count() >= need
            });
            if full {
                return height.max(0.0);
            }
        }
        0.0
    }

    /// The largest sum of clipped heights over a pixel and its neighbours, at the peak time of one
    /// of its lit pixels.
    ///
    /// No sum exceeds that of the pixels' own clipped peaks (of the times tried): patches are tried from the highest such
    /// sum down, until even a three sigma gain by slopes cannot lift the next above the best.
    pub(super) fn patch_margin(&mut self, clip_pe: f32, stream: &mut Stream) -> f32 {
        let kind = self.kind;
        let mut patches = core::mem::take(&mut self.raised);
        patches.clear();
        for &centre in &self.touched {
            let near = kind.camera.neighbours(usize::from(centre));
            let all = || near.iter().copied().chain([centre]).map(usize::from);
            if all().all(|p| self.mark[p] != EMPTY) {
                let most = all().map(|p| self.height[p].min(clip_pe)).sum::<f32>();
                patches.push((most, f32::from(centre)));
            }
        }
        patches.sort_unstable_by(|a, b| b.0.total_cmp(&a.0).then(a.1.total_cmp(&b.1)));
        let mut margin = 0.0_f32;
        for &(most, centre) in &patches {
            let gain = 7.0 * self.noise_rms * self.noise_rms * 9.0 / (4.0 * most.max(1e-3));
            if most <= 0.0 || most + gain < margin {
                break;
            }
            let best = self.patch_sum(centre as u16, clip_pe);
            if best > 0.0 {
                let near = kind.camera.neighbours(centre as usize).iter().map(|&p| usize::from(p));
                let free = near.chain([centre as usize]).filter(|&p| self.height[p] < clip_pe);
                let free = free.count() as f32;
                margin = margin.max(best + self.slope_gain(best, free, stream));
            }
        }
        self.raised = patches;
        margin
    }

    /// The largest clipped sum of one patch at the peak time of one of its lit pixels.
    fn patch_sum(&self, centre: u16, clip_pe: f32) -> f32 {
        let near = self.kind.camera.neighbours(usize::from(centre));
        let all = || near.iter().copied().chain([centre]).map(usize::from);
        let mut best = f32::NEG_INFINITY;
        for moment in all().filter(|&p| self.mark[p] == LIT).map(|p| self.peak_ns[p]) {
            let height = |p: usize| {
                let light = self.per_pixel[p].as_slice();
                self.noise[p] + pulse_sum(light, moment, self.sigma_ns)
            };
            best = best.max(all().map(|p| height(p).min(clip_pe)).sum());
        }
        best
    }

    /// What a peak of `height` gains by noise that slopes under it: for a gaussian top of curvature
    /// height / sigma^2 and a noise slope of variance n rms^2 / (2 sigma^2), n rms^2 z^2 / (4 height).
    pub(super) fn slope_gain(&self, height: f32, pixels: f32, stream: &mut Stream) -> f32 {
        let variance = pixels * self.noise_rms * self.noise_rms;
        if height * height <= variance {
            return 0.0;
        }
        variance * (stream.normal() as f32).powi(2) / (4.0 * height)
    }

    /// Whether two pixels peak within the gate.
    fn together(&self, a: usize, b: usize) -> bool {
        let apart = (self.peak_ns[a] - self.peak_ns[b]).abs();
        f64::from(apart) <= self.kind.coincidence_gate_ns
    }

    fn root(&mut self, mut pixel: u16) -> u16 {
        while self.parent[usize::from(pixel)] != pixel {
            let up = self.parent[usize::from(self.parent[usize::from(pixel)])];
            self.parent[usize::from(pixel)] = up;
            pixel = up;
        }
        pixel
    }

    fn join(&mut self, a: u16, b: u16) -> u16 {
        let (a, b) = (self.root(a), self.root(b));
        if a != b {
            self.parent[usize::from(b)] = a;
            self.members[usize::from(a)] += self.members[usize::from(b)];
        }
        self.members[usize::from(a)]
    }
}
