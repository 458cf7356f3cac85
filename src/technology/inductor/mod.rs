//! stub
use super::SpiralProcess;
pub struct SpiralGeometry {
    pub turns: u32,
    pub trace_m: f64,
    pub diameter_m: f64,
}
pub struct SolvedSpiral {
    pub series_inductance_h: f64,
    pub series_resistance_ohm: f64,
    pub quality: f64,
    pub inductance_h: f64,
    pub resistance_ohm: f64,
    pub self_resonance_hz: Option<f64>,
}
pub fn solve(_p: &SpiralProcess, _g: &SpiralGeometry, _f: f64) -> Result<SolvedSpiral, ()> {
    Err(())
}
pub fn trace_for(_p: &SpiralProcess, _t: u32, _d: f64, _l: f64, _f: f64) -> Result<f64, ()> {
    Err(())
}
pub fn footprint_m2(p: &SpiralProcess, d: f64) -> f64 {
    (d + 2.0 * p.keep_out_m).powi(2)
}
