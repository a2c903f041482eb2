//! Verifying a record: nothing in it is believed that can be made again.
//!
//! - [`verify`] goes through the parts (a) to (f) and gives an [`Account`] of what was checked, what differs, and
//!   what that shows;
//! - [`gifts`] are blocks of sealed records that a new run need not draw again;
//! - [`fresh`] runs the plan of a record again under a root drawn now, and compares every estimate.

mod account;
mod again;
mod bag;
mod blocks;
mod difference;
mod draws;
mod figures;
mod fresh;
mod gifts;
mod lot;
mod opened;
mod verify;

pub use account::{Account, Finding, Part, Standing};
pub use fresh::{Beside, Fresh, LEVEL, fresh, roots};
pub use gifts::{Gifts, Given, Search, gifts};
pub use lot::{Audit, Chance};
pub use verify::{Request, verify};
