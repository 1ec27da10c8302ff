//! Colours, dashes, markers.

use plotters::style::RGBColor;

/// Sizes in drawing units: four to a CSS pixel, so that 44 is about 8.3 points on paper.
pub(super) const TICK_FONT: i32 = 44;
pub(super) const LABEL_FONT: i32 = 48;
pub(super) const LINE: u32 = 8;
pub(super) const INK: RGBColor = RGBColor(30, 30, 30);
pub(super) const PALE: RGBColor = RGBColor(190, 190, 190);
pub(super) const GRID: RGBColor = RGBColor(226, 226, 226);

/// Okabe & Ito's colours for colour-blind readers, without the yellow that paper swallows.
const COLOURS: [RGBColor; 7] = [
    RGBColor(0x00, 0x72, 0xB2),
    RGBColor(0xD5, 0x5E, 0x00),
    RGBColor(0x00, 0x9E, 0x73),
    RGBColor(0xCC, 0x79, 0xA7),
    RGBColor(0xE6, 0x9F, 0x00),
    RGBColor(0x56, 0xB4, 0xE9),
    RGBColor(0x00, 0x00, 0x00),
];

/// Lengths drawn and left out in turn; empty for a full line.
const DASHES: [&[f64]; 6] = [
    &[],
    &[52.0, 26.0],
    &[12.0, 22.0],
    &[64.0, 22.0, 12.0, 22.0],
    &[96.0, 30.0],
    &[44.0, 18.0, 12.0, 18.0, 12.0, 18.0],
];

/// Shape of a marker.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Marker {
    Disc,
    Square,
    Triangle,
    Ring,
    Diamond,
    Box,
}

const MARKERS: [Marker; 6] =
    [Marker::Disc, Marker::Square, Marker::Triangle, Marker::Ring, Marker::Diamond, Marker::Box];

/// How one curve looks.
#[derive(Clone, Copy, Debug)]
pub(super) struct Look {
    pub colour: RGBColor,
    pub dash: &'static [f64],
    pub marker: Marker,
}

/// The look of the curve of some number.
pub(super) fn look(index: usize) -> Look {
    Look {
        colour: COLOURS[index % COLOURS.len()],
        dash: DASHES[index % DASHES.len()],
        marker: MARKERS[index % MARKERS.len()],
    }
}
