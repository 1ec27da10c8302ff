//! Checks against the world: standards, handbook tables, papers. A module a layer.

mod atmosphere;
mod cascade;
mod hadronic;
mod layout;
mod light;
mod rates;
mod refraction;
mod telescope;
