//! The bath: the project file, the recipe in trade units, limits and operating ranges, and how they become totals
//! in mol/L of a chemical system.
//!
//! This floor may read and write files; it knows no dose search, no sheet and no window.

mod adjust;
mod air;
mod demo;
mod error;
mod file;
mod flags;
mod history;
mod operating;
mod project;
mod recipe;
mod resolve;
mod running;
mod shift;

pub use adjust::{Adjuster, Adjustment, Corrected};
pub use air::Air;
pub use demo::{DEMOS, Demo};
pub use error::BathError;
pub use file::{FileError, load, read, replace_file, save, write};
pub use flags::{Flag, flags};
pub use history::History;
pub use operating::{Ph, Range};
pub use project::{
    Adjust, AgentDose, Content, FORMAT, Limit, Project, Rule, SheetDetails, SolidRule, Tank, Trust,
};
pub use resolve::{Agent, Bath, Point, ResolvedLimit, Solids, Wall};
pub use running::Running;
pub use shift::{Load, Rate, Replenish, Shift, Water};
