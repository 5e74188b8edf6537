//! The dose: whether it holds over the operating range, how surely, and the smallest one that does.
//!
//! This floor asks the bath for equilibria and knows neither sheets nor windows.

mod assess;
mod blend;
mod curve;
mod extreme;
mod judge;
mod ledger;
mod measure;
mod places;
mod plan;
mod reason;
mod sampling;
mod search;
mod verdict;

pub use assess::{Assessment, Assessor, CONFIDENCE_95, MetalReading, Reading, WallReading, WorstPlaces};
pub use blend::{Aim, Binding, Blend, BlendError, MOST_AGENTS, Worsening, blend};
pub use ledger::{Holder, LedgerEntry, ledger};
pub use measure::{Direction, Measured, ROUNDING_FLAG, measure};
pub use places::Place;
pub use plan::{Addition, Plan, Step, acid_refused, addition_cap, plan};
pub use reason::{Change, Reason, why_none};
pub use sampling::{Sampled, sample};
pub use search::{Band, Found, Hold, Search, search};
pub use verdict::{State, Verdict, place as place_words, share as share_of_limit, verdict, wall_name};
