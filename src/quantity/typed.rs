//! Numbers that carry their unit and their gas condition in the type.
//!
//! A lung volume or ventilation is counted at body temperature and pressure, saturated (BTPS); carbon dioxide
//! production is counted dry at 0 °C and 760 mmHg (STPD). The two differ by about a fifth, so they never mix:
//!
//! ```compile_fail
//! use tidewright::quantity::typed::{BtpsFlow, StpdFlow};
//! let sum = BtpsFlow::from_ml_per_min(5000.0) + StpdFlow::from_ml_per_min(200.0);
//! ```

use std::marker::PhantomData;
use std::ops::{Add, Div, Mul, Sub};

/// A finite number in the unit `U`.
#[derive(Debug, Clone, Copy, PartialEq, PartialOrd)]
pub struct Quantity<U> {
    value: f64,
    unit: PhantomData<U>,
}

impl<U> Quantity<U> {
    const fn new(value: f64) -> Self {
        Self { value, unit: PhantomData }
    }
}

impl<U> Add for Quantity<U> {
    type Output = Self;
    fn add(self, other: Self) -> Self {
        Self::new(self.value + other.value)
    }
}

impl<U> Sub for Quantity<U> {
    type Output = Self;
    fn sub(self, other: Self) -> Self {
        Self::new(self.value - other.value)
    }
}

impl<U> Mul<f64> for Quantity<U> {
    type Output = Self;
    fn mul(self, factor: f64) -> Self {
        Self::new(self.value * factor)
    }
}

impl<U> Div<f64> for Quantity<U> {
    type Output = Self;
    fn div(self, divisor: f64) -> Self {
        Self::new(self.value / divisor)
    }
}

/// Like divided by like is a plain ratio.
impl<U> Div for Quantity<U> {
    type Output = f64;
    fn div(self, other: Self) -> f64 {
        self.value / other.value
    }
}

/// Millimetres of mercury: partial pressures of a gas.
#[derive(Debug, Clone, Copy, PartialEq, PartialOrd)]
pub struct MmHg;
/// Degrees Celsius: body temperature.
#[derive(Debug, Clone, Copy, PartialEq, PartialOrd)]
pub struct Celsius;
/// Millilitres at BTPS: lung volumes.
#[derive(Debug, Clone, Copy, PartialEq, PartialOrd)]
pub struct MillilitreBtps;
/// Millilitres per minute at BTPS: ventilation.
#[derive(Debug, Clone, Copy, PartialEq, PartialOrd)]
pub struct MillilitrePerMinuteBtps;
/// Millilitres per minute at STPD: carbon dioxide production.
#[derive(Debug, Clone, Copy, PartialEq, PartialOrd)]
pub struct MillilitrePerMinuteStpd;

/// A partial pressure of gas.
pub type GasPressure = Quantity<MmHg>;
/// A body temperature.
pub type Temperature = Quantity<Celsius>;
/// A lung volume, BTPS.
pub type Volume = Quantity<MillilitreBtps>;
/// A ventilation, BTPS.
pub type BtpsFlow = Quantity<MillilitrePerMinuteBtps>;
/// A gas production, STPD.
pub type StpdFlow = Quantity<MillilitrePerMinuteStpd>;

impl GasPressure {
    /// From mmHg.
    pub const fn from_mmhg(value: f64) -> Self {
        Self::new(value)
    }
    /// In mmHg.
    pub const fn mmhg(self) -> f64 {
        self.value
    }
}

impl Temperature {
    /// From degrees Celsius.
    pub const fn from_celsius(value: f64) -> Self {
        Self::new(value)
    }
    /// In degrees Celsius.
    pub const fn celsius(self) -> f64 {
        self.value
    }
}

impl Volume {
    /// From mL BTPS.
    pub const fn from_ml(value: f64) -> Self {
        Self::new(value)
    }
    /// In mL BTPS.
    pub const fn ml(self) -> f64 {
        self.value
    }
    /// This volume moved `rate_per_min` times a minute.
    pub const fn times_rate(self, rate_per_min: f64) -> BtpsFlow {
        BtpsFlow::new(self.value * rate_per_min)
    }
}

impl BtpsFlow {
    /// From mL/min BTPS.
    pub const fn from_ml_per_min(value: f64) -> Self {
        Self::new(value)
    }
    /// In mL/min BTPS.
    pub const fn ml_per_min(self) -> f64 {
        self.value
    }
    /// The volume of one of `rate_per_min` equal breaths.
    pub const fn per_breath(self, rate_per_min: f64) -> Volume {
        Volume::new(self.value / rate_per_min)
    }
}

impl StpdFlow {
    /// From mL/min STPD.
    pub const fn from_ml_per_min(value: f64) -> Self {
        Self::new(value)
    }
    /// In mL/min STPD.
    pub const fn ml_per_min(self) -> f64 {
        self.value
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn like_adds_to_like_and_rates_turn_volumes_into_flows() {
        let breath = Volume::from_ml(300.0) + Volume::from_ml(80.0) - Volume::from_ml(10.0);
        assert!((breath.ml() - 370.0).abs() < 1e-12);
        assert!((breath.times_rate(20.0).ml_per_min() - 7400.0).abs() < 1e-12);
        assert!((breath.times_rate(20.0).per_breath(20.0) / breath - 1.0).abs() < 1e-12);
        assert!(((GasPressure::from_mmhg(40.0) * 1.5 / 2.0).mmhg() - 30.0).abs() < 1e-12);
    }
}
