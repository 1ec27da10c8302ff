//! The array condition as a vote over bit planes.

/// Events in which at least `k` of the planes fire.
///
/// Counts sixty-four events at a time in bit-sliced counters: adding a plane is a ripple of
/// half-adders, comparing with `k` one pass from the highest bit.
///
/// # Shape
/// All planes have one u64 a word.
pub fn at_least(planes: &[&[u64]], k: usize) -> Vec<u64> {
    let words = planes.first().map_or(0, |plane| plane.len());
    if k == 0 {
        return vec![u64::MAX; words];
    }
    if k > planes.len() {
        return vec![0; words];
    }
    let digits = (usize::BITS - planes.len().leading_zeros()) as usize;
    let mut out = Vec::with_capacity(words);
    let mut counter = [0_u64; usize::BITS as usize];
    for word in 0..words {
        counter[..digits].fill(0);
        for plane in planes {
            let mut carry = plane[word];
            for digit in &mut counter[..digits] {
                let sum = *digit ^ carry;
                carry &= *digit;
                *digit = sum;
            }
        }
        out.push(not_less(&counter[..digits], k));
    }
    out
}

/// Lanes whose bit-sliced count is at least `k`.
fn not_less(counter: &[u64], k: usize) -> u64 {
    let (mut greater, mut equal) = (0, u64::MAX);
    for (digit, bits) in counter.iter().enumerate().rev() {
        if (k >> digit) & 1 == 1 {
            equal &= bits;
        } else {
            greater |= equal & bits;
            equal &= !bits;
        }
    }
    greater | equal
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::numerics::{Stage, Stream};

    #[test]
    fn the_vote_is_a_count_over_events() {
        let mut stream = Stream::keyed(1, Stage::Search, &[1]);
        for telescopes in 1..12_usize {
            let planes: Vec<Vec<u64>> =
                (0..telescopes).map(|_| (0..20).map(|_| stream.bits()).collect()).collect();
            let slices: Vec<&[u64]> = planes.iter().map(Vec::as_slice).collect();
            for k in 0..=telescopes + 1 {
                let voted = at_least(&slices, k);
                for word in 0..20 {
                    for event in 0..64 {
                        let count =
                            planes.iter().filter(|plane| plane[word] >> event & 1 == 1).count();
                        assert_eq!(voted[word] >> event & 1 == 1, count >= k);
                    }
                }
            }
        }
    }
}
