//! Layout layer: the vote of independent telescopes against the binomial law. Sixty-four events a
//! word hold every pattern of three telescopes eight times, so that the count is exact.
//!
//! `cargo run --release --example two_of_three`

use nightpool::layout::at_least;

fn main() {
    // Bit i of plane t is bit t of i: all eight patterns of three telescopes, eight times over.
    let plane = |telescope: u32| (0..64_u64).fold(0, |word, i| word | ((i >> telescope & 1) << i));
    let planes: Vec<Vec<u64>> = (0..3).map(|telescope| vec![plane(telescope)]).collect();
    let slices: Vec<&[u64]> = planes.iter().map(Vec::as_slice).collect();
    for (least, exact) in [(1, 56), (2, 32), (3, 8)] {
        let kept = at_least(&slices, least)[0].count_ones();
        println!("{least} of 3: {kept} of 64 events, exact {exact}");
        assert_eq!(kept, exact);
    }
}
