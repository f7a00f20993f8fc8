//! TEMPORARY
#![allow(missing_docs, clippy::all)]
#[derive(Debug, Clone, Copy)]
pub struct PlaceKey(u64);
#[derive(Debug, Clone, Copy)]
pub struct Purpose(u64);
#[derive(Debug)]
pub struct Stream(u64);
impl Purpose {
    pub fn young(stage: usize) -> Self {
        Self(stage as u64)
    }
    pub fn survival(stage: usize) -> Self {
        Self(100 + stage as u64)
    }
    pub fn fate(stage: usize) -> Self {
        Self(200 + stage as u64)
    }
}
impl PlaceKey {
    pub fn draw(self, p: Purpose) -> Stream {
        Stream(self.0 ^ p.0)
    }
}
pub fn binomial(_: &mut Stream, n: u32, p: f64) -> u32 {
    (f64::from(n) * p) as u32
}
pub fn poisson(_: &mut Stream, m: f64) -> u32 {
    m as u32
}
