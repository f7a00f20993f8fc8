//! The weather, correlated deviates by patch and year, and the yearly rates that they mean; catastrophes.

pub mod catastrophe;
pub mod field;
pub mod rates;
mod record;
mod table;
mod weather;

pub use catastrophe::{Catastrophe, CatastropheState, Catastrophes};
pub use field::{Field, MOST_CORRELATED_PLACES};
pub use rates::{Located, RateCurves, YearlyRate};
pub use record::{Record, Use};
pub use table::{Correlation, EnvironmentTable};
pub use weather::{Weather, WeatherState};
