//! Checks against mathematics: limits, conservation, convergence, two methods. A module a layer.

mod air_profiles;
mod atmosphere;
mod cascade;
mod command;
mod engine_commands;
mod engines;
mod hadronic;
mod layout;
mod light;
mod muon_light;
mod plan_checks;
mod rates;
mod report;
mod response;
mod response_command;
mod response_scene;
mod scan;
mod search_command;
mod telescope;
mod telescope_noise;
