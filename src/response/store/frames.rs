//! Data frames of a sample's words, pads, margins and images, and back.

use polars::prelude::{Column, DataFrame, NamedFrom, PolarsResult, Series};

use crate::response::EVENTS_PER_WORD;
use crate::response::image::CellImage;
use crate::response::margin::Code;
use crate::response::pad::PadKey;
use crate::response::sample::{Sample, Word};
use crate::telescope::ImageSummary;

fn column<T>(name: &str, values: Vec<T>) -> Column
where
    Series: NamedFrom<Vec<T>, [T]>,
    T: Sized,
{
    Series::new(name.into(), values).into()
}

fn frame(columns: Vec<Column>) -> PolarsResult<DataFrame> {
    let height = columns.first().map_or(0, Column::len);
    DataFrame::new(height, columns)
}

/// Words by number; the exposure is that of one repetition of the throw.
pub fn words(sample: &Sample) -> PolarsResult<DataFrame> {
    let numbers = sample.first_word..sample.first_word + sample.words.len();
    let exposures = numbers.clone().map(|number| sample.throw.word(number).exposure).collect();
    frame(vec![
        column("word", numbers.map(|number| number as u32).collect()),
        column("energy_gev", sample.words.iter().map(|word| word.energy_gev).collect()),
        column::<f64>("exposure_m2_gev_sr", exposures),
        column("ring", sample.words.iter().map(|word| word.ring as u32).collect()),
        column("angle_rad", sample.words.iter().map(|word| word.angle_rad).collect()),
    ])
}

/// Pads by their number in this block.
pub fn pads(sample: &Sample) -> PolarsResult<DataFrame> {
    let of = |field: fn(&PadKey) -> i64| sample.pads.iter().map(field).collect::<Vec<i64>>();
    let kinds: Vec<&str> = sample.pads.iter().map(|pad| pad.kind.as_str()).collect();
    frame(vec![
        column("pad", (0..sample.pads.len() as u32).collect()),
        Series::new("kind".into(), kinds).into(),
        column("x_mm", of(|pad| pad.x_mm)),
        column("y_mm", of(|pad| pad.y_mm)),
        column("z_mm", of(|pad| pad.z_mm)),
    ])
}

/// Margins above the floor of the code.
pub fn margins(sample: &Sample) -> PolarsResult<DataFrame> {
    let first = (sample.first_word * EVENTS_PER_WORD) as u64;
    let (mut pads, mut events, mut codes) = (Vec::new(), Vec::new(), Vec::new());
    for (pad, column) in sample.margins.iter().enumerate() {
        for (event, &code) in column.iter().enumerate().filter(|(_, code)| **code > 0) {
            pads.push(pad as u32);
            events.push(first + event as u64);
            codes.push(u32::from(code));
        }
    }
    frame(vec![column("pad", pads), column("event", events), column("margin_code", codes)])
}

/// Fields of an image in the order of its columns.
const IMAGE_FIELDS: [&str; 10] = [
    "photoelectrons",
    "time_ns",
    "size_pe",
    "centroid_x_deg",
    "centroid_y_deg",
    "length_deg",
    "width_deg",
    "orientation_rad",
    "edge_fraction",
    "time_slope_ns_deg",
];

/// Images.
pub fn images(sample: &Sample) -> PolarsResult<DataFrame> {
    let first = (sample.first_word * EVENTS_PER_WORD) as u64;
    let (mut pads, mut events) = (Vec::new(), Vec::new());
    let mut fields: [Vec<f32>; 10] = Default::default();
    for (pad, cells) in sample.images.iter().enumerate() {
        for cell in cells {
            pads.push(pad as u32);
            events.push(first + u64::from(cell.event));
            let CellImage { photoelectrons, time_ns, summary, .. } = *cell;
            let [x, y] = summary.centroid_deg;
            let ImageSummary { size_pe, length_deg, width_deg, .. } = summary;
            let (turn, edge) = (summary.orientation_rad, summary.edge_fraction);
            let slope = summary.time_slope_ns_deg;
            let values =
                [photoelectrons, time_ns, size_pe, x, y, length_deg, width_deg, turn, edge, slope];
            for (field, value) in fields.iter_mut().zip(values) {
                field.push(value);
            }
        }
    }
    let mut columns = vec![column("pad", pads), column("event", events)];
    columns.extend(IMAGE_FIELDS.iter().zip(fields).map(|(name, field)| column(name, field)));
    frame(columns)
}

macro_rules! reader {
    ($name:ident, $type:ty, $method:ident) => {
        fn $name(frame: &DataFrame, name: &str) -> PolarsResult<Vec<$type>> {
            Ok(frame.column(name)?.$method()?.into_no_null_iter().collect())
        }
    };
}
reader!(u32s, u32, u32);
reader!(u64s, u64, u64);
reader!(i64s, i64, i64);
reader!(f64s, f64, f64);
reader!(f32s, f32, f32);

/// Words of a frame.
pub fn words_of(frame: &DataFrame) -> PolarsResult<Vec<Word>> {
    let (energies, rings) = (f64s(frame, "energy_gev")?, u32s(frame, "ring")?);
    let (exposures, angles) = (f64s(frame, "exposure_m2_gev_sr")?, f64s(frame, "angle_rad")?);
    let rows = energies.into_iter().zip(exposures).zip(rings.into_iter().zip(angles));
    let word = |((energy_gev, exposure), (ring, angle_rad))| Word {
        energy_gev,
        exposure,
        ring: ring as usize,
        angle_rad,
    };
    Ok(rows.map(word).collect())
}

/// Pads of a frame.
pub fn pads_of(frame: &DataFrame) -> PolarsResult<Vec<PadKey>> {
    let kinds = frame.column("kind")?.str()?;
    let (x, y, z) = (i64s(frame, "x_mm")?, i64s(frame, "y_mm")?, i64s(frame, "z_mm")?);
    let keys = kinds.iter().enumerate().map(|(at, kind)| PadKey {
        kind: kind.unwrap_or_default().to_owned(),
        x_mm: x[at],
        y_mm: y[at],
        z_mm: z[at],
    });
    Ok(keys.collect())
}

/// Margins of a frame, dense; nothing if a row lies outside the block.
pub fn margins_of(
    frame: &DataFrame,
    first_word: usize,
    words: usize,
    pads: usize,
) -> PolarsResult<Option<Vec<Vec<Code>>>> {
    let first = (first_word * EVENTS_PER_WORD) as u64;
    let mut margins = vec![vec![0; words * EVENTS_PER_WORD]; pads];
    let rows = u32s(frame, "pad")?.into_iter().zip(u64s(frame, "event")?);
    for ((pad, event), code) in rows.zip(u32s(frame, "margin_code")?) {
        let place = event.checked_sub(first).map(|event| event as usize);
        let column = margins.get_mut(pad as usize);
        let cell = column.zip(place).and_then(|(column, place)| column.get_mut(place));
        match (cell, Code::try_from(code)) {
            (Some(cell), Ok(code)) => *cell = code,
            _ => return Ok(None),
        }
    }
    Ok(Some(margins))
}

/// Images of a frame by pad; nothing if a row lies outside the block.
pub fn images_of(
    frame: &DataFrame,
    first_word: usize,
    words: usize,
    pads: usize,
) -> PolarsResult<Option<Vec<Vec<CellImage>>>> {
    let first = (first_word * EVENTS_PER_WORD) as u64;
    let end = first + (words * EVENTS_PER_WORD) as u64;
    let fields: Vec<Vec<f32>> =
        IMAGE_FIELDS.iter().map(|name| f32s(frame, name)).collect::<PolarsResult<_>>()?;
    let mut images = vec![Vec::new(); pads];
    let rows = u32s(frame, "pad")?.into_iter().zip(u64s(frame, "event")?);
    for (row, (pad, event)) in rows.enumerate() {
        let Some(column) = images.get_mut(pad as usize).filter(|_| (first..end).contains(&event))
        else {
            return Ok(None);
        };
        let at = |field: usize| fields[field][row];
        let summary = ImageSummary {
            size_pe: at(2),
            centroid_deg: [at(3), at(4)],
            length_deg: at(5),
            width_deg: at(6),
            orientation_rad: at(7),
            edge_fraction: at(8),
            time_slope_ns_deg: at(9),
        };
        let event = (event - first) as u32;
        column.push(CellImage { event, photoelectrons: at(0), time_ns: at(1), summary });
    }
    Ok(Some(images))
}
