//! Candidate layouts: explicit positions and patterns over spacings.

use crate::layout::candidate::repeated;
use crate::layout::cost::KindPrice;
use crate::layout::generator::Pattern;
use crate::layout::geography::from_geojson;
use crate::layout::{Candidate, Condition, Member};
use crate::telescope::TelescopeKind;

use super::error::StudyError;
use super::file::Companions;
use super::reader::{Section, limits};
use super::resolved::{Layout, Placed, Scan, Site};

const MOST_TELESCOPES: usize = 200;
const MOST_LAYOUTS: usize = 10_000;
/// Coincidence window of an array unless a study says otherwise. Common practice, no source.
const WINDOW_NS: f64 = 80.0;

/// Kinds of telescopes, the site, and what stands there already.
type Ground<'a> = (&'a [TelescopeKind], &'a Site, &'a [Placed]);

/// Reads `[[built]]`: telescopes that stand already and are members of every layout.
pub(super) fn built(
    root: &Section<'_>,
    kinds: &[TelescopeKind],
    site: &Site,
) -> Result<Vec<Placed>, StudyError> {
    let mut telescopes = Vec::new();
    for stand in root.sections("built")? {
        add_stand(&stand, kinds, site, &mut telescopes)?;
        stand.finish()?;
    }
    Ok(telescopes)
}

/// Whether a telescope of a file is one that stands already, to the centimetre.
fn is_built(placed: &Placed, built: &[Placed]) -> bool {
    let near = |other: &Placed| {
        let apart = |axis: usize| (placed.enu_m[axis] - other.enu_m[axis]).abs();
        other.kind == placed.kind && (0..3).all(|axis| apart(axis) < 0.01)
    };
    built.iter().any(near)
}

/// Reads `[[layout]]`, `[[layout_family]]` and `layouts_file`.
pub(super) fn layouts(
    root: &Section<'_>,
    ground: Ground<'_>,
    files: &mut Companions,
) -> Result<Vec<Layout>, StudyError> {
    let mut layouts: Vec<Layout> = Vec::new();
    for section in root.sections("layout")? {
        let layout = explicit(&section, ground)?;
        admit(&section, layout, &mut layouts)?;
        section.finish()?;
    }
    for section in root.sections("layout_family")? {
        family(&section, ground, &mut layouts)?;
        section.finish()?;
    }
    if let Some(name) = root.text_if_any("layouts_file")? {
        imported(root, name, ground, files, &mut layouts)?;
    }
    if layouts.is_empty() {
        let problem = "missing from the study; write at least one [[layout]] or [[layout_family]]";
        return Err(root.wrong("layout", problem));
    }
    Ok(layouts)
}

/// Layouts without those that are the same as an earlier one, and the names of such pairs. For
/// vertical showers without a magnetic field copies that are moved, turned or mirrored are the
/// same. Places of a scan stay.
pub(super) fn distinct(
    layouts: Vec<Layout>,
    up_to_symmetry: bool,
) -> (Vec<Layout>, Vec<[String; 2]>) {
    let candidate = |layout: &Layout| {
        let member = |placed: &Placed| Member { position_m: placed.enu_m, kind: placed.kind };
        let members = layout.telescopes.iter().map(member).collect();
        let condition = Condition::any(layout.condition);
        Candidate { name: layout.name.clone(), members, condition }
    };
    let candidates: Vec<Candidate> = layouts.iter().map(candidate).collect();
    let (mut kept, mut left_out) = (Vec::new(), Vec::new());
    for (layout, first) in layouts.into_iter().zip(repeated(&candidates, up_to_symmetry)) {
        match first.filter(|_| layout.scan.is_none()) {
            Some(first) => left_out.push([layout.name, candidates[first].name.clone()]),
            None => kept.push(layout),
        }
    }
    (kept, left_out)
}

/// Reads layouts of a GeoJSON file of points with the properties `layout`, `kind` and `condition`:
/// one that a report has written, or of anybody's mapping program.
fn imported(
    root: &Section<'_>,
    name: &str,
    (kinds, site, built): Ground<'_>,
    files: &mut Companions,
    layouts: &mut Vec<Layout>,
) -> Result<(), StudyError> {
    const KEY: &str = "layouts_file";
    let (path, text) = files.read(root, KEY, name)?;
    let fault = |problem: String| root.wrong(KEY, format!("{}: {problem}", path.display()));
    let names: Vec<String> = kinds.iter().map(|kind| kind.name.clone()).collect();
    let candidates = from_geojson(&text, &names, site.reference());
    for candidate in candidates.map_err(|error| fault(error.to_string()))? {
        let least = candidate.condition.clauses.first().map_or(1, |clause| clause.least);
        let members = candidate.members.iter().map(|member| member.kind);
        let members: Vec<usize> = members.chain(built.iter().map(|placed| placed.kind)).collect();
        let checked = candidate.condition.check(&members);
        checked.map_err(|error| fault(format!("layout {}: {error}", candidate.name)))?;
        let mut telescopes = built.to_vec();
        for member in candidate.members {
            let placed = Placed { kind: member.kind, enu_m: member.position_m };
            if is_built(&placed, built) {
                continue;
            }
            let stands = stands(&placed, &telescopes, kinds, site);
            stands.map_err(|problem| fault(format!("layout {}: {problem}", candidate.name)))?;
            telescopes.push(placed);
        }
        let (condition, window_ns) = (least, WINDOW_NS);
        let (name, line) = (candidate.name, root.line());
        let layout = Layout { name, telescopes, condition, window_ns, scan: None, line };
        admit(root, layout, layouts)?;
    }
    Ok(())
}

/// Telescopes that must fire together, and within what time.
fn condition(section: &Section<'_>, telescopes: usize) -> Result<(usize, f64), StudyError> {
    let most = telescopes.max(1) as u64;
    let condition = section.count_or("telescopes_required", 1, most, most.min(2))? as usize;
    let window_ns = section.number_or("window_ns", limits(1.0, 10_000.0, "ns"), WINDOW_NS)?;
    Ok((condition, window_ns))
}

fn kind_index(
    section: &Section<'_>,
    key: &'static str,
    kinds: &[TelescopeKind],
) -> Result<usize, StudyError> {
    let names: Vec<&str> = kinds.iter().map(|kind| kind.name.as_str()).collect();
    section.choice(key, &names)
}

fn explicit(section: &Section<'_>, (kinds, site, built): Ground<'_>) -> Result<Layout, StudyError> {
    let name = section.text("name")?.to_owned();
    let mut telescopes = built.to_vec();
    for stand in section.sections("stand")? {
        add_stand(&stand, kinds, site, &mut telescopes)?;
        stand.finish()?;
    }
    let (condition, window_ns) = condition(section, telescopes.len())?;
    Ok(Layout { name, telescopes, condition, window_ns, scan: None, line: section.line() })
}

/// Telescopes of one kind at some points.
fn add_stand(
    stand: &Section<'_>,
    kinds: &[TelescopeKind],
    site: &Site,
    telescopes: &mut Vec<Placed>,
) -> Result<(), StudyError> {
    let kind = kind_index(stand, "telescope", kinds)?;
    let range = limits(-20_000.0, 20_000.0, "m");
    let missing = || stand.wrong_section("no position; write at_enu_m = [[east, north], ...]");
    let points = stand.points_if_any("at_enu_m", range)?.ok_or_else(missing)?;
    for (index, point) in points.iter().enumerate() {
        let up = point.get(2).copied().unwrap_or(0.0);
        if !(up.abs() <= 1_000.0) {
            let problem = format!("point {}: up must be from -1000 to 1000 m", index + 1);
            return Err(stand.wrong("at_enu_m", problem));
        }
        let placed = Placed { kind, enu_m: [point[0], point[1], up] };
        if let Err(problem) = stands(&placed, telescopes, kinds, site) {
            return Err(stand.wrong("at_enu_m", format!("point {}: {problem}", index + 1)));
        }
        telescopes.push(placed);
    }
    Ok(())
}

fn family(
    section: &Section<'_>,
    (kinds, site, built): Ground<'_>,
    layouts: &mut Vec<Layout>,
) -> Result<(), StudyError> {
    let name = section.text("name")?;
    let kind = kind_index(section, "telescope", kinds)?;
    let shape = pattern(section)?;
    let counts = counts(section)?;
    let range = limits(1.0, 5_000.0, "m");
    let missing = || section.wrong_section("no spacing; write spacings_m = [...], in metres");
    let spacings = section.numbers_if_any("spacings_m", range)?.ok_or_else(missing)?;
    if spacings.is_empty() {
        return Err(section.wrong("spacings_m", "is empty; write at least one spacing"));
    }
    let turn = section.number_or("turn_deg", limits(-360.0, 360.0, "degrees"), 0.0)?.to_radians();
    let centre = section.tuple_if_any::<2>("centre_enu_m", limits(-2e4, 2e4, "m"))?;
    let centre = centre.unwrap_or_default();
    let (condition, window_ns) = condition(section, counts[0] + built.len())?;
    let areas = scanned_areas(section)?;
    let scan = areas.len().max(1) * spacings.len() > 1;
    let of_kind = |area: Option<f64>| match area {
        Some(area) => {
            let wanted = scanned_name(&kinds[kind].name, area);
            kinds.iter().position(|kind| kind.name == wanted).unwrap_or(kind)
        }
        None => kind,
    };
    let areas: Vec<Option<f64>> =
        if areas.is_empty() { vec![None] } else { areas.into_iter().map(Some).collect() };
    let places = areas.iter().flat_map(|a| spacings.iter().map(move |s| (*a, *s)));
    let several = counts.len() > 1;
    for (count, (area, spacing)) in
        counts.iter().flat_map(|&count| places.clone().map(move |place| (count, place)))
    {
        let kind = of_kind(area);
        let mut telescopes = built.to_vec();
        for [x, y] in shape.positions_m(count, spacing) {
            // Azimuths turn from north towards east.
            let east = centre[0] + x * turn.cos() + y * turn.sin();
            let north = centre[1] - x * turn.sin() + y * turn.cos();
            let placed = Placed { kind, enu_m: [east, north, 0.0] };
            if let Err(problem) = stands(&placed, &telescopes, kinds, site) {
                return Err(section.wrong("spacings_m", format!("at {spacing} m: {problem}")));
            }
            telescopes.push(placed);
        }
        let mirror = area.map_or(String::new(), |area| format!(" {area} m2"));
        let number = if several { format!(" of {count}") } else { String::new() };
        let scan = scan.then(|| Scan {
            family: format!("{name}{number}"),
            mirror_area_m2: kinds[kind].mirror_area_m2,
            spacing_m: spacing,
        });
        let name = format!("{name}{number}{mirror} {spacing} m");
        let line = section.line();
        admit(section, Layout { name, telescopes, condition, window_ns, scan, line }, layouts)?;
    }
    Ok(())
}

/// Numbers of telescopes, rising: one, or those of a scan.
fn counts(section: &Section<'_>) -> Result<Vec<usize>, StudyError> {
    const KEY: &str = "telescope_numbers";
    let most = MOST_TELESCOPES as f64;
    let Some(numbers) = section.numbers_if_any(KEY, limits(1.0, most, "telescopes"))? else {
        return Ok(vec![section.count("telescopes", 1, MOST_TELESCOPES as u64)? as usize]);
    };
    if section.has("telescopes") {
        return Err(section.wrong(KEY, "write either telescopes or telescope_numbers"));
    }
    let rising = numbers.windows(2).all(|pair| pair[0] < pair[1]);
    if numbers.is_empty() || !rising || numbers.iter().any(|number| number.fract() != 0.0) {
        return Err(section.wrong(KEY, "write rising whole numbers, such as [3, 4, 5]"));
    }
    Ok(numbers.into_iter().map(|number| number as usize).collect())
}

fn scanned_areas(section: &Section<'_>) -> Result<Vec<f64>, StudyError> {
    let range = limits(0.1, 5_000.0, "m2");
    Ok(section.numbers_if_any("mirror_areas_m2", range)?.unwrap_or_default())
}

fn scanned_name(kind: &str, mirror_area_m2: f64) -> String {
    format!("{kind} of {mirror_area_m2} m2")
}

/// Adds a kind for each mirror area that a family scans: like the family's, but for its mirror's
/// area and its cost, which follows the power law of [`KindPrice::of_mirror`].
pub(super) fn add_scanned_kinds(
    root: &Section<'_>,
    kinds: &mut Vec<TelescopeKind>,
) -> Result<(), StudyError> {
    for section in root.sections("layout_family")? {
        let base = kinds[kind_index(&section, "telescope", kinds)?].clone();
        for area in scanned_areas(&section)? {
            let name = scanned_name(&base.name, area);
            if kinds.iter().all(|kind| kind.name != name) {
                let reference = (base.mirror_area_m2, base.cost);
                let price = KindPrice::of_mirror(area, reference, (0, 0.0), (0.0, 0.0));
                let cost = price.telescope;
                kinds.push(TelescopeKind { name, mirror_area_m2: area, cost, ..base.clone() });
            }
        }
    }
    Ok(())
}

/// The pattern of a family, with the numbers that some of them take.
fn pattern(section: &Section<'_>) -> Result<Pattern, StudyError> {
    const PATTERNS: [&str; 7] =
        ["square", "hexagon", "ring", "line", "cross", "clusters", "graded"];
    Ok(match section.choice("pattern", &PATTERNS)? {
        0 => Pattern::Square,
        1 => Pattern::Triangular,
        2 => Pattern::Ring,
        3 => Pattern::Line,
        4 => Pattern::Cross,
        5 => Pattern::Clusters {
            members: section.count("cluster_telescopes", 1, MOST_TELESCOPES as u64)? as usize,
            separation: section.number("cluster_separation", limits(1.0, 100.0, "spacings"))?,
        },
        _ => Pattern::Graded {
            power: section.number("grading_power", limits(1.0, 4.0, "1: an even grid"))?,
        },
    })
}

/// Whether a telescope can stand where it is put.
fn stands(
    placed: &Placed,
    others: &[Placed],
    kinds: &[TelescopeKind],
    site: &Site,
) -> Result<(), String> {
    let [east, north, _] = placed.enu_m;
    let radius =
        |placed: &Placed| (kinds[placed.kind].mirror_area_m2 / core::f64::consts::PI).sqrt();
    for other in others {
        let distance = (other.enu_m[0] - east).hypot(other.enu_m[1] - north);
        let least = radius(placed) + radius(other);
        if distance < least {
            return Err(format!(
                "two telescopes stand on one spot: [{east}, {north}] is {distance:.1} m from \
                 another; their mirrors need at least {least:.1} m"
            ));
        }
    }
    let free = site.constraints().ground([east, north]);
    free.map_err(|place| format!("[{east:.1}, {north:.1}] lies {place}"))
}

fn admit(
    section: &Section<'_>,
    layout: Layout,
    layouts: &mut Vec<Layout>,
) -> Result<(), StudyError> {
    if layout.telescopes.is_empty() {
        return Err(
            section.wrong_section("holds no telescope; write at least one [[layout.stand]]")
        );
    }
    if layout.telescopes.len() > MOST_TELESCOPES {
        let problem = format!("holds over {MOST_TELESCOPES} telescopes, the most allowed");
        return Err(section.wrong_section(problem));
    }
    if layouts.iter().any(|known| known.name == layout.name) {
        let problem = format!("two layouts are named \"{}\"; write another name", layout.name);
        return Err(section.wrong("name", problem));
    }
    if layouts.len() == MOST_LAYOUTS {
        return Err(section.wrong_section(format!("over {MOST_LAYOUTS} layouts; write fewer")));
    }
    layouts.push(layout);
    Ok(())
}
