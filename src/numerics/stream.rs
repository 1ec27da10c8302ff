//! Random streams keyed by identity, so that any event can be made again alone.

use rand::{Rng, RngExt, SeedableRng};
use rand_xoshiro::Xoshiro256PlusPlus;

/// What a stream is used for; the first word of its key after the seed.
///
/// Two stages never share a stream, whatever their other key words are.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
#[repr(u64)]
pub enum Stage {
    /// Primary energy, direction and first interaction.
    Primary = 1,
    /// Shower development.
    Shower = 2,
    /// Core positions.
    Core = 3,
    /// Photoelectrons and noise of one image.
    Image = 4,
    /// Resampling of showers.
    Bootstrap = 5,
    /// Layout search.
    Search = 6,
    /// Night-sky noise alone.
    Noise = 7,
    /// Making of tables.
    Table = 8,
}

/// A random stream (xoshiro256++) whose state is a hash of its identity.
///
/// The key is (seed, stage, further words such as shower, core, pad, kind). Streams of different
/// keys are independent for all practical purposes: the 256-bit state is filled by four rounds of
/// a 64-bit finaliser over all key words, so two of 2^40 streams overlap within 2^40 draws with
/// probability below 1e-40.
///
/// # Source
/// Blackman & Vigna 2021, ACM Trans. Math. Softw. 47, 36 (xoshiro); the mixing function is the
/// 64-bit finaliser of Steele, Lea & Flood 2014, OOPSLA, 453 (SplitMix).
#[derive(Clone, Debug)]
pub struct Stream(Xoshiro256PlusPlus);

impl Stream {
    /// The stream of one identity.
    pub fn keyed(seed: u64, stage: Stage, words: &[u64]) -> Self {
        let mut hash = mix(seed ^ 0x6A09_E667_F3BC_C909);
        hash = mix(hash ^ (stage as u64).wrapping_mul(0x9E37_79B9_7F4A_7C15));
        for (position, word) in words.iter().enumerate() {
            let place = (position as u64 + 1).wrapping_mul(0xD1B5_4A32_D192_ED03);
            hash = mix(hash.rotate_left(23) ^ mix(word.wrapping_add(place)));
        }
        let mut state = [0_u8; 32];
        for chunk in state.chunks_exact_mut(8) {
            hash = hash.wrapping_add(0x9E37_79B9_7F4A_7C15);
            chunk.copy_from_slice(&mix(hash).to_le_bytes());
        }
        Self(Xoshiro256PlusPlus::from_seed(state))
    }

    /// Uniform in [0, 1), 53 bits.
    #[inline]
    pub fn uniform(&mut self) -> f64 {
        self.0.random::<f64>()
    }

    /// Uniform in (0, 1]: safe under a logarithm.
    #[inline]
    pub fn uniform_positive(&mut self) -> f64 {
        1.0 - self.uniform()
    }

    /// Exponential with unit mean.
    #[inline]
    pub fn exponential(&mut self) -> f64 {
        -self.uniform_positive().ln()
    }

    /// 64 random bits.
    #[inline]
    pub fn bits(&mut self) -> u64 {
        self.0.next_u64()
    }

    /// Standard normal deviate (ziggurat of the `rand_distr` crate).
    #[inline]
    pub fn normal(&mut self) -> f64 {
        self.0.sample(rand_distr::StandardNormal)
    }

    /// Poisson deviate; zero for a mean that is not positive.
    pub fn poisson(&mut self, mean: f64) -> u64 {
        if !(mean > 0.0) {
            return 0;
        }
        if mean < 12.0 {
            // Knuth's product method: cheapest for the small means that dominate here.
            let limit = (-mean).exp();
            let mut product = self.uniform();
            let mut count = 0;
            while product > limit {
                product *= self.uniform();
                count += 1;
            }
            return count;
        }
        match rand_distr::Poisson::new(mean) {
            Ok(law) => {
                let deviate: f64 = self.0.sample(law);
                deviate as u64
            }
            // Beyond the crate's range (about 1.8e19) the normal limit is exact to 1e-9.
            Err(_) => (mean + mean.sqrt() * self.normal()) as u64,
        }
    }

    /// A point uniform on the unit circle, as (cos, sin).
    #[inline]
    pub fn direction(&mut self) -> (f64, f64) {
        let (sin, cos) = (core::f64::consts::TAU * self.uniform()).sin_cos();
        (cos, sin)
    }

    /// The generator itself, for distributions of other crates.
    #[inline]
    pub fn generator(&mut self) -> &mut impl Rng {
        &mut self.0
    }
}

/// A bijective 64-bit finaliser with full avalanche.
#[inline]
fn mix(mut word: u64) -> u64 {
    word = (word ^ (word >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
    word = (word ^ (word >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
    word ^ (word >> 31)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn streams_of_different_keys_differ_and_of_one_key_agree() {
        let draw = |words: &[u64]| Stream::keyed(7, Stage::Shower, words).bits();
        assert_eq!(draw(&[1, 2]), draw(&[1, 2]));
        assert_ne!(draw(&[1, 2]), draw(&[2, 1]));
        assert_ne!(draw(&[1]), draw(&[1, 0]));
        assert_ne!(
            Stream::keyed(7, Stage::Core, &[1]).bits(),
            Stream::keyed(7, Stage::Shower, &[1]).bits()
        );
    }

    #[test]
    fn poisson_has_the_right_mean_and_variance_on_both_branches() {
        for mean in [0.3_f64, 5.0, 11.9, 12.1, 400.0] {
            let mut stream = Stream::keyed(1, Stage::Noise, &[mean.to_bits()]);
            let count = 200_000;
            let (mut sum, mut square) = (0.0, 0.0);
            for _ in 0..count {
                let draw = stream.poisson(mean) as f64;
                sum += draw;
                square += draw * draw;
            }
            let average = sum / f64::from(count);
            let variance = square / f64::from(count) - average * average;
            // Five standard errors of the mean; the variance has relative error sqrt(2/n) at most
            // sqrt(2 + 1/mean) / sqrt(n).
            let error = (mean / f64::from(count)).sqrt();
            assert!((average - mean).abs() < 5.0 * error, "{mean}: {average}");
            let spread = ((2.0 + 1.0 / mean) / f64::from(count)).sqrt();
            assert!((variance / mean - 1.0).abs() < 5.0 * spread, "{mean}: {variance}");
        }
    }
}
