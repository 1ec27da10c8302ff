//! One HTML page that stands alone: charts inline, no scripts, nothing loaded.

use maud::{DOCTYPE, Markup, PreEscaped, html};

use super::hazards::HAZARDS;
use super::result::PlanResult;
use super::{charts, figures};

const STYLE: &str = include_str!("page.css");

/// The report as one self-contained page.
pub fn page(result: &PlanResult) -> String {
    let from = &result.provenance;
    let markup = html! {
        (DOCTYPE)
        html lang="en" {
            head {
                meta charset="utf-8";
                meta name="viewport" content="width=device-width, initial-scale=1";
                meta name="generator" content={ "nightpool " (from.version) };
                title { (from.title) }
                style { (PreEscaped(STYLE)) }
            }
            body {
                main {
                    h1 { (from.title) }
                    (lead(result))
                    (warnings(result))
                    (ranking(result))
                    (figure(charts::layout_map_chart(result), "Where the telescopes of the leading layouts stand. Symbols grow with the mirror's diameter and are not to scale.", "layouts.geojson"))
                    (figure(charts::effective_area_chart(result), "Effective area for gamma rays after the array trigger, before any image cut. Bars: standard errors from independent showers.", "effective_area.csv"))
                    (figure(charts::differential_rate_chart(result), "Differential trigger rate of the reference source. Its peak is the trigger threshold.", "differential_rate.csv"))
                    (figure(charts::light_pool_chart(result), "Mean Cherenkov light on the ground. Bars: standard errors of the mean.", "light_pool.csv"))
                    @if let Some(svg) = charts::scan_chart(result) {
                        (figure(svg, "Score over mirror area and spacing, every mirror area simulated as its own kind. A frame marks the best of the family, dots the places that the errors cannot tell from it.", "scans.csv"))
                    }
                    (figure(charts::site_map_chart(result), "The leading layout on its ground. Curves: where the light of a gamma ray of the layout's threshold energy, its core in the middle of the telescopes, stays under half and under a tenth of the density inside 100 m, on level ground.", "layouts.geojson"))
                    (super::checks::sections(result))
                    (super::thresholds::section(result))
                    (primaries(result))
                    (telescopes(result))
                    (limits(result))
                    (cautions())
                    (models(result))
                    (footer(result))
                }
            }
        }
    };
    markup.into_string()
}

fn lead(result: &PlanResult) -> Markup {
    let site = &result.site;
    html! {
        p.lead {
            @if let Some(first) = result.ranking.first() {
                "Of " (result.ranking.len()) " layouts, "
                strong { (first.layout) }
                " (" (first.kinds) ") leads by " code { (result.provenance.score) } ": gamma trigger rate "
                (figures::with_error(first.gamma_rate_hz, first.gamma_rate_error_hz)) " Hz at a threshold of "
                (figures::with_error(first.threshold_gev, first.threshold_error_gev)) " GeV, over "
                (figures::with_error(first.background_rate_hz, first.background_rate_error_hz))
                " Hz of background. "
                @let equals = result.ranking.iter().filter(|row| row.tier == first.tier).count();
                @if equals > 1 {
                    "The errors cannot tell it from " (equals - 1)
                    @if equals == 2 { " other layout" } @else { " other layouts" } " (tier 1)."
                }
            } @else { "No layout was ranked." }
        }
        p {
            (site.name) ": " (figures::degrees(site.latitude_deg, 'N', 'S')) ", "
            (figures::degrees(site.longitude_deg, 'E', 'W')) ", " (format!("{:.0}", site.altitude_m)) " m above the sea, "
            (format!("{:.0}", site.depth_g_cm2)) " g/cm² of air overhead"
            @if site.cutoff_gv > 0.0 { ", vertical geomagnetic cutoff " (format!("{:.1}", site.cutoff_gv)) " GV" }
            ". Pointing: zenith angle "
            (format!("{:.1}", site.zenith_deg)) "°, azimuth " (format!("{:.1}", site.azimuth_deg)) "° from north through east."
        }
    }
}

fn warnings(result: &PlanResult) -> Markup {
    html! {
        @if !result.warnings.is_empty() {
            section.warnings {
                h2 { "Before you use these numbers" }
                ul { @for warning in &result.warnings { li { (warning) } } }
            }
        }
    }
}

fn ranking(result: &PlanResult) -> Markup {
    html! {
        section {
            h2 { "Ranking" }
            p {
                "Rates after the array trigger, with statistical standard errors. All layouts saw the same showers, so differences "
                "between neighbours are better known than the rates: " em { "ahead of next" }
                " is the share of paired resamples in which the order holds. Layouts of one tier cannot be told apart."
            }
            div.wide {
                table {
                    thead { tr {
                        th { "Rank" } th { "Tier" } th.text { "Layout" } th.text { "Telescopes" } th { "Required" }
                        th { "Gamma rate (Hz)" } th { "Background (Hz)" } th { "Threshold (GeV)" }
                        th { "Accidental (Hz)" } th { "Cost" } th { "Ahead of next" }
                    } }
                    tbody { @for row in &result.ranking {
                        tr.shade[row.tier % 2 == 0] {
                            td { (row.rank) } td { (row.tier) } td.text { (row.layout) } td.text { (row.kinds) }
                            td { (row.condition) }
                            td { (figures::with_error(row.gamma_rate_hz, row.gamma_rate_error_hz)) }
                            td { (figures::with_error(row.background_rate_hz, row.background_rate_error_hz)) }
                            td { (figures::with_error(row.threshold_gev, row.threshold_error_gev)) }
                            td { (figures::short(row.accidental_rate_hz)) }
                            td { (figures::short(row.cost)) }
                            td { (figures::percent(row.order_probability)) }
                        }
                    } }
                }
            }
            (figure(charts::ranking_chart(result), "The ranking with standard errors. Shading sets tiers apart.", "ranking.csv"))
        }
    }
}

fn figure(svg: String, caption: &str, data: &str) -> Markup {
    html! {
        figure {
            (PreEscaped(svg))
            figcaption { (caption) " Data: " a href=(data) { (data) } "." }
        }
    }
}

/// What each primary adds, for the leading layouts.
fn primaries(result: &PlanResult) -> Markup {
    let shown = result.ranking.iter().take(charts::SHOWN);
    html! {
        section {
            h2 { "What triggers" }
            p {
                "Rates with standard errors from independent showers. The peak energy is where dR/dE is highest; peaks of cosmic "
                "rays below the lowest thrown energy are shown as a dash. Recorded gamma rates have the readout's dead time taken off."
            }
            div.wide { table {
                thead { tr {
                    th.text { "Layout" } th.text { "Primary" } th { "Rate (Hz)" } th { "Peak energy (GeV)" }
                    th { "Recorded gamma rays per hour" } th { "Dead time" }
                } }
                tbody { @for layout in shown {
                    @for row in result.primaries.iter().filter(|row| row.layout == layout.layout) { tr {
                        td.text { (row.layout) } td.text { (row.primary) }
                        td { (figures::with_error(row.rate_hz, row.rate_error_hz)) }
                        td { (figures::with_error(row.peak_energy_gev, row.peak_energy_error_gev)) }
                        @if row.primary == "gamma" {
                            td { (figures::short(layout.gamma_rate_per_hour)) }
                            td { (figures::percent(layout.dead_fraction)) }
                        } @else { td {} td {} }
                    } }
                } }
            } }
            p { "Data: " a href="primaries.csv" { "primaries.csv" } "." }
        }
    }
}

fn telescopes(result: &PlanResult) -> Markup {
    html! {
        section {
            h2 { "Telescopes under this sky" }
            div.wide { table {
                thead { tr {
                    th.text { "Kind" } th { "Net mirror (m²)" } th { "Pixels" } th { "Pitch (°)" } th { "Field (°)" }
                    th { "Sky (p.e./ns/pixel)" } th { "Threshold (p.e.)" } th.text { "Set by" } th { "Accidental, one telescope (Hz)" } th.text { "Trigger" }
                } }
                tbody { @for kind in &result.kinds { tr {
                    td.text { (kind.kind) } td { (format!("{:.1}", kind.mirror_area_m2)) } td { (kind.pixels) }
                    td { (figures::short(kind.pixel_pitch_deg)) } td { (figures::short(kind.field_of_view_deg)) }
                    td { (figures::short(kind.sky_pe_per_ns)) } td { (figures::short(kind.threshold_pe)) }
                    td.text { (kind.threshold_choice) } td { (figures::short(kind.accidental_rate_hz)) } td.text { (kind.topology) }
                } } }
            } }
        }
    }
}

fn limits(result: &PlanResult) -> Markup {
    html! {
        section {
            h2 { "What is approximate" }
            @if result.approximations.is_empty() { p { "Nothing was stated for this run." } }
            @else { dl { @for item in &result.approximations { dt { (item.what) } dd { (item.size) } } } }
            @if !result.counters.is_empty() {
                h3 { "Counted, not hidden" }
                div.wide { table {
                    thead { tr { th.text { "What" } th { "Count" } th { "Out of" } } }
                    tbody { @for counter in &result.counters {
                        tr { td.text { (counter.name) } td { (counter.count) } td { (counter.of) } }
                    } }
                } }
            }
        }
    }
}

fn cautions() -> Markup {
    html! {
        section.cautions {
            h2 { "Cautions for those who build" }
            dl { @for (name, text) in HAZARDS { dt { (name) } dd { (text) } } }
        }
    }
}

fn models(result: &PlanResult) -> Markup {
    html! {
        section {
            h2 { "Published models that this run used" }
            @if result.provenance.models.is_empty() { p { "None." } }
            ul { @for model in &result.provenance.models { li { (model.purpose) ": " (model.citation) } } }
        }
    }
}

fn footer(result: &PlanResult) -> Markup {
    let from = &result.provenance;
    html! {
        footer {
            p {
                "nightpool " (from.version) " · study " code { (from.study) } " · SHA-256 " code { (from.study_checksum) }
                " · seed " (from.seed) " · engine " (from.engine) " · " (from.resamples) " resamples"
            }
            p { @for (primary, showers, events) in &from.simulated {
                (primary) ": " (showers) " showers, " (events) " array events. "
            } }
        }
    }
}
