//! The bath: the project file, the recipe in trade units, limits and operating ranges, and how they become totals
//! in mol/L of a chemical system.
//!
//! This floor may read and write files; it knows no dose search, no sheet and no window.

mod adjust;
mod air;
mod analysis;
mod demo;
mod drift;
mod error;
mod file;
mod flags;
mod history;
mod operating;
mod project;
mod recipe;
mod resolve;
mod rinse;
mod running;
mod shift;
mod solving;
mod wall;

pub use adjust::{Adjuster, Adjustment, Corrected, Corrector};
pub use air::Air;
pub use analysis::{Analysis, Analyzed, Finding, HARDNESS, MeterReading, Origin};
pub use demo::{DEMOS, Demo};
pub use drift::{Drift, DriftAxis, HardnessRange, LoadRange, MAX_DRIFTS, Position, Span};
pub use error::BathError;
pub use file::{FileError, load, read, replace_file, save, write};
pub use flags::{Flag, flags};
pub use history::History;
pub use operating::{Ph, Range};
pub use project::{
    Adjust, AgentDose, Content, FORMAT, Limit, Project, Rule, SheetDetails, SolidRule, Tank, Trust,
};
pub use resolve::{Agent, Bath};
pub use rinse::{Arrangement, FreshWater, PermitLimit, PhSpan, Rinse};
pub use running::Running;
pub use shift::{Load, Rate, Replenish, Shift, Water};
pub use solving::{Point, Points, Solids};
pub use wall::{Derived, ResolvedDerived, ResolvedLimit, Wall};
