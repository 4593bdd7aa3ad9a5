//! A mixture of normal distributions of ln PaCO2: its distribution function and quantiles in closed form.

use std::f64::consts::{PI, SQRT_2};

/// Half of the mass is narrow and half is wide: gases have heavier tails than one normal distribution.
/// The shares of the variance; their mean is 1.
const NARROW: f64 = 0.25;
/// The wide half's share of the variance.
const WIDE: f64 = 1.75;
/// Weights below this cannot move a quantile by 1e-9.
const NEGLIGIBLE: f64 = 1e-17;
/// Means closer than this are one: rounding.
const COINCIDE: f64 = 1e-13;

/// Points with weights, each spread by the same shape. Mass that is missing from 1 lies at infinity.
#[derive(Debug, Clone, PartialEq)]
pub struct Mixture {
    points: Vec<(f64, f64)>,
    narrow: f64,
    wide: f64,
    mass: f64,
}

/// The distribution function, its density and the density's slope at one place.
struct At {
    below: f64,
    density: f64,
    slope: f64,
}

impl Mixture {
    /// From `(weight, mean)` pairs and the standard deviation `S` of the next gas.
    pub fn new(points: impl Iterator<Item = (f64, f64)>, deviation: f64) -> Self {
        let mut kept: Vec<(f64, f64)> = Vec::new();
        for (weight, mean) in points.filter(|(weight, _)| *weight > NEGLIGIBLE) {
            match kept.last_mut() {
                // Where every breath left the same room, the dead space cancels and all points coincide.
                Some((heavier, at)) if (mean - *at).abs() < COINCIDE => *heavier += weight,
                _ => kept.push((weight, mean)),
            }
        }
        let points = kept;
        let mass = points.iter().map(|(weight, _)| weight).sum();
        Self { points, narrow: NARROW.sqrt() * deviation, wide: WIDE.sqrt() * deviation, mass }
    }

    fn at(&self, z: f64) -> At {
        let (mut below, mut density, mut slope) = (0.0, 0.0, 0.0);
        for (weight, mean) in &self.points {
            for deviation in [self.narrow, self.wide] {
                let u = (z - mean) / deviation;
                let half = 0.5 * weight;
                let peak = half / deviation * libm::exp(-0.5 * u * u);
                below += half * normal_below(u);
                density += peak;
                slope -= peak * u / deviation;
            }
        }
        let root = (2.0 * PI).sqrt();
        At { below, density: density / root, slope: slope / root }
    }

    /// The probability that ln PaCO2 lies below `z`.
    pub fn below(&self, z: f64) -> f64 {
        let mut below = 0.0;
        for (weight, mean) in &self.points {
            for deviation in [self.narrow, self.wide] {
                below += 0.5 * weight * normal_below((z - mean) / deviation);
            }
        }
        below
    }

    /// The density of ln PaCO2 at `z`.
    pub fn density(&self, z: f64) -> f64 {
        let mut density = 0.0;
        for (weight, mean) in &self.points {
            for deviation in [self.narrow, self.wide] {
                let u = (z - mean) / deviation;
                density += 0.5 * weight / deviation * libm::exp(-0.5 * u * u);
            }
        }
        density / (2.0 * PI).sqrt()
    }

    /// The place below which a share `p` lies; `None` when the mass at infinity reaches down to it.
    ///
    /// Halley's method inside a bracket that is halved whenever a step would leave it.
    pub fn quantile(&self, p: f64) -> Option<f64> {
        if p >= self.mass {
            return None;
        }
        let (mut low, mut high) = self.span();
        let mut z = self.guess(p).clamp(low, high);
        for _ in 0..200 {
            let at = self.at(z);
            let miss = at.below - p;
            if miss > 0.0 {
                high = z;
            } else {
                low = z;
            }
            let newton = miss / at.density;
            let step = newton / (1.0 - 0.5 * newton * at.slope / at.density);
            let next = z - step;
            // Halley's steps shrink cubically: after one of 1e-4 deviations the next would be far below 1e-9.
            if step.abs() < 1e-4 * self.narrow && next >= low && next <= high {
                return Some(next);
            }
            z = if next > low && next < high { next } else { f64::midpoint(low, high) };
            if high - low < 1e-13 {
                return Some(z);
            }
        }
        Some(z)
    }

    /// A bracket that holds every quantile between 1e-15 and 1 − 1e-15 of the mass.
    fn span(&self) -> (f64, f64) {
        let lowest = self.points.iter().map(|(_, mean)| *mean).fold(f64::INFINITY, f64::min);
        let highest = self.points.iter().map(|(_, mean)| *mean).fold(f64::NEG_INFINITY, f64::max);
        (lowest - 10.0 * self.wide, highest + 10.0 * self.wide)
    }

    /// Where one normal distribution of the same mean and variance would have the quantile, roughly.
    fn guess(&self, p: f64) -> f64 {
        let mean = self.points.iter().map(|(weight, mean)| weight * mean).sum::<f64>() / self.mass;
        let between =
            self.points.iter().map(|(weight, m)| weight * (m - mean) * (m - mean)).sum::<f64>() / self.mass;
        let within = f64::midpoint(self.narrow * self.narrow, self.wide * self.wide);
        // Deviates of this shape at 5, 25, 50, 75, 95 %, read off it; only a start for the search.
        let share = p / self.mass;
        let deviate = 1.15 * (share - 0.5) * (2.0 + 2.8 * (2.0 * share - 1.0).abs().powi(6));
        mean + deviate * (between + within).sqrt()
    }
}

/// The standard normal distribution function.
fn normal_below(u: f64) -> f64 {
    0.5 * libm::erfc(-u / SQRT_2)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// One point, S = 1: 0.5·Φ(2z) + 0.5·Φ(z/1.3228757). At z = 1: 0.5·0.9772499 + 0.5·0.7751541, from a table of Φ.
    #[test]
    fn one_point_against_a_table_of_the_normal_distribution() {
        let mixture = Mixture::new([(1.0, 0.0)].into_iter(), 1.0);
        let (narrow, wide) = (0.977_249_868, 0.775_154);
        assert!((mixture.below(1.0) - f64::midpoint(narrow, wide)).abs() < 2e-5);
        assert!(mixture.quantile(0.5).unwrap().abs() < 1e-12);
    }

    #[test]
    fn quantiles_invert_the_distribution() {
        let mixture = Mixture::new([(0.2, -1.0), (0.5, 0.3), (0.3, 2.0)].into_iter(), 0.7);
        for p in [0.001, 0.05, 0.25, 0.5, 0.75, 0.95, 0.999] {
            assert!((mixture.below(mixture.quantile(p).unwrap()) - p).abs() < 1e-12, "{p}");
        }
    }

    #[test]
    fn mass_at_infinity_has_no_quantile() {
        let mixture = Mixture::new([(0.6, 0.0), (0.3, 0.1)].into_iter(), 0.2);
        assert_eq!(mixture.quantile(0.95), None);
        assert!(mixture.quantile(0.5).is_some());
    }
}
