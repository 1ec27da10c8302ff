//! Checks against the world: standards, handbook tables, papers. A module a layer.

mod atmosphere;
mod cascade;
mod hadronic;
mod layout;
mod light;
mod published;
mod rates;
mod refraction;
mod telescope;
