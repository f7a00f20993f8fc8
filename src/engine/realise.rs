//! The year's realised rates of a patch.
use crate::demography::Rate;
use crate::environment::EnvironmentTable;
use crate::random::ReplicateKey;
pub(super) type WeatherNow = ();
#[derive(Debug)]
pub(super) struct Rates { means: Vec<f64> }
impl Rates {
    pub(super) fn compile(rates: &[Rate], _: &EnvironmentTable, _: &[[f64; 2]], _: &[u64]) -> Result<Self, String> { Ok(Self { means: rates.iter().map(|r| r.mean).collect() }) }
    pub(super) fn means(&self) -> &[f64] { &self.means }
    pub(super) fn weather_now(&self) -> Option<()> { None }
    pub(super) fn begin(&self, _: &mut Option<()>, _: ReplicateKey) {}
    pub(super) fn advance(&self, _: &mut Option<()>, _: u32) {}
    pub(super) fn realise<'a>(&'a self, _: &Option<()>, _: usize, _: &'a mut [f64]) -> &'a [f64] { &self.means }
}
