//! Light of the reference cascade, quantum by quantum.
//!
//! `yields` says how many counted quanta a metre of track gives and how they are delayed; `rays`
//! draws them from track steps; `pool` gathers them in rings about the axis; `pads` gathers them
//! on collecting discs for many core positions at once.

pub mod pads;
pub mod pool;
pub mod rays;
pub mod shower;
pub mod yields;

pub use pads::{
    Basket, CollectSettings, Collected, Collector, PadDisc, SkyQuantum, Target, collected,
};
pub use pool::{PoolDensity, PoolRequest, pool_density};
pub use rays::{Ray, Window, emit};
pub use yields::Yields;
