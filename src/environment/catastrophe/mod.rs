//! Catastrophes: rare years that leave a share of survival, fecundity (or growth) and capacity.
//!
//! [`Catastrophe`] is what one `[[catastrophe]]` of the study says; what it may strike is listed under `strikes`, how long
//! it lasts is told in `lasts`. [`Catastrophes`] are all of them over the patches of a landscape, drawn year by year into
//! the [`CatastropheState`] of a replicate. Several that strike a patch in one year multiply their shares.

mod compiled;
mod lasts;
mod shares;
mod strikes;
mod table;

pub use compiled::{CatastropheState, Catastrophes};
pub use lasts::Lasts;
pub use shares::Shares;
pub use strikes::{Begins, Strikes};
pub use table::Catastrophe;
