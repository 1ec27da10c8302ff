//! Prices, what is built already, the volume of data.

use crate::layout::Tariff;
use crate::layout::cost::KindPrice;
use crate::telescope::TelescopeKind;

use super::error::StudyError;
use super::reader::{Section, limits};
use super::resolved::{Placed, Recording, Site};

/// Reads `[costs]`: prices beside the telescopes' own.
pub(super) fn tariff(
    section: Option<Section<'_>>,
    kinds: &[TelescopeKind],
    site: &Site,
    built: &[Placed],
) -> Result<Tariff, StudyError> {
    let price = limits(0.0, 1e12, "the unit of cost");
    let (mut pad, mut pixel, mut trench_per_m, mut mirror) = (0.0, 0.0, 0.0, None);
    if let Some(section) = section {
        pad = section.number_or("per_pad", price, 0.0)?;
        pixel = section.number_or("per_pixel", price, 0.0)?;
        trench_per_m = section.number_or("trench_per_m", price, 0.0)?;
        mirror =
            section.tuple_if_any::<2>("mirror_area_m2_and_cost", limits(1e-6, 1e12, "m2, cost"))?;
        section.finish()?;
    }
    let of = |kind: &TelescopeKind| match mirror {
        Some([area_m2, cost]) if kind.cost == 0.0 => KindPrice::of_mirror(
            kind.mirror_area_m2,
            (area_m2, cost),
            (kind.camera.pixels.len(), pixel),
            (0.0, pad),
        ),
        _ => KindPrice { telescope: kind.cost + pixel * kind.camera.pixels.len() as f64, pad },
    };
    Ok(Tariff {
        kinds: kinds.iter().map(of).collect(),
        trench_per_m,
        control_house_m: site.control_house_enu_m.map(|[east, north]| [east, north, 0.0]),
        built: built.iter().map(|placed| (placed.enu_m, placed.kind)).collect(),
    })
}

/// Reads `[recording]`: what an event takes on disk, and how long a night is.
pub(super) fn recording(section: Option<Section<'_>>) -> Result<Recording, StudyError> {
    let mut recording = Recording { bytes_per_pixel: 2.0, hours_per_night: 8.0 };
    if let Some(section) = section {
        let (bytes, hours) = (limits(0.01, 1e6, "bytes"), limits(0.1, 24.0, "h"));
        recording.bytes_per_pixel =
            section.number_or("bytes_per_pixel", bytes, recording.bytes_per_pixel)?;
        recording.hours_per_night =
            section.number_or("hours_per_night", hours, recording.hours_per_night)?;
        section.finish()?;
    }
    Ok(recording)
}
