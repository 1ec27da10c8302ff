//! What the table keeps of an image besides its margin.

use crate::telescope::{ImageRecord, ImageSummary};

/// Images whose margin is below this are kept as their margin only, photoelectrons.
///
/// Common practice, no source: a group of pixels of two photoelectrons is noise.
pub const IMAGE_FLOOR_PE: f64 = 2.0;

/// One image of the table: a cell whose margin reaches [`IMAGE_FLOOR_PE`].
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CellImage {
    /// Event of the sample: 64 x word + place in the word.
    pub event: u32,
    /// Photoelectrons inside the camera.
    pub photoelectrons: f32,
    /// Mean arrival time, ns.
    pub time_ns: f32,
    /// Moments of the cleaned image.
    pub summary: ImageSummary,
}

impl CellImage {
    /// What is kept of a record; nothing if its margin is below the floor.
    pub fn of(event: u32, record: &ImageRecord) -> Option<Self> {
        let ImageRecord { margin_pe, photoelectrons, time_ns, summary } = *record;
        (f64::from(margin_pe) >= IMAGE_FLOOR_PE).then_some(Self {
            event,
            photoelectrons,
            time_ns,
            summary,
        })
    }
}
