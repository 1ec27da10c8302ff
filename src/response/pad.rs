//! What names a column of the table: a position and a telescope kind.

use serde::{Deserialize, Serialize};

use super::scene::Column;

/// A telescope kind on a spot of ground, to the millimetre.
///
/// Columns are named by this key and never by their place in a list, so that a table can be
/// extended without a change to what is there. The order is by kind, then east, north, up.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize, Deserialize)]
pub struct PadKey {
    /// Name of the telescope kind.
    pub kind: String,
    /// East, mm.
    pub x_mm: i64,
    /// North, mm.
    pub y_mm: i64,
    /// Up, mm.
    pub z_mm: i64,
}

impl PadKey {
    /// The key of a kind at a position in metres, rounded to the millimetre.
    pub fn new(position_m: [f64; 3], kind: &str) -> Self {
        let [x_mm, y_mm, z_mm] = position_m.map(|metres| (metres * 1e3).round() as i64);
        Self { kind: kind.to_owned(), x_mm, y_mm, z_mm }
    }

    /// The key of a column of a scene whose kinds have these names.
    pub fn of(column: &Column, kinds: &[crate::telescope::TelescopeKind]) -> Self {
        Self::new(column.position_m, &kinds[column.kind].name)
    }

    /// Position, m.
    pub fn position_m(&self) -> [f64; 3] {
        [self.x_mm, self.y_mm, self.z_mm].map(|mm| mm as f64 * 1e-3)
    }

    /// Words that name it in the keys of random streams: position, and a hash of the kind's name
    /// (FNV-1a, 64 bits: Fowler, Noll & Vo, RFC 9923).
    pub fn stream_words(&self) -> [u64; 4] {
        let hash = self.kind.bytes().fold(0xCBF2_9CE4_8422_2325_u64, |hash, byte| {
            (hash ^ u64::from(byte)).wrapping_mul(0x0100_0000_01B3)
        });
        [self.x_mm as u64, self.y_mm as u64, self.z_mm as u64, hash]
    }
}

#[cfg(test)]
mod tests {
    use super::PadKey;

    #[test]
    fn keys_round_to_the_millimetre_and_tell_kinds_apart() {
        let key = PadKey::new([10.000_4, -3.25, 0.0], "broad");
        assert_eq!(key, PadKey::new([10.0, -3.25, 0.000_1], "broad"));
        assert_ne!(key, PadKey::new([10.0, -3.25, 0.0], "narrow"));
        assert_ne!(
            key.stream_words()[3],
            PadKey::new([10.0, -3.25, 0.0], "narrow").stream_words()[3]
        );
        // Published check value of FNV-1a (RFC 9923): the hash of "foobar".
        assert_eq!(PadKey::new([0.0; 3], "foobar").stream_words()[3], 0x8594_4171_F739_67E8);
        assert_eq!(key.position_m(), [10.0, -3.25, 0.0]);
    }
}
