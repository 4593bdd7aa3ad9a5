//! Finding where a continuous function crosses zero, and where it is highest.

/// Relative width at which a bracket counts as closed: a few units in the last place of an `f64`.
const CLOSED: f64 = 4.0 * f64::EPSILON;
/// Bisection alone needs about 60 halvings from any bracket met here; the method below is never much slower.
const MOST_STEPS: usize = 200;

/// The root of `f` between `low` and `high`, by Brent's method (R. P. Brent, *Algorithms for Minimization
/// without Derivatives*, 1973, ch. 4). `None` unless `f` has opposite signs (or a zero) at the ends.
pub fn crossing(f: impl Fn(f64) -> f64, low: f64, high: f64) -> Option<f64> {
    let (mut a, mut b) = (low, high);
    let (mut fa, mut fb) = (f(a), f(b));
    if fa == 0.0 {
        return Some(a);
    }
    if fb == 0.0 {
        return Some(b);
    }
    if fa.signum() * fb.signum() > 0.0 || fa.is_nan() || fb.is_nan() {
        return None;
    }
    let (mut c, mut fc) = (a, fa);
    let (mut step, mut previous) = (b - a, b - a);
    for _ in 0..MOST_STEPS {
        if fb * fc > 0.0 {
            (c, fc) = (a, fa);
            step = b - a;
            previous = step;
        }
        if fc.abs() < fb.abs() {
            (a, b, c) = (b, c, b);
            (fa, fb, fc) = (fb, fc, fb);
        }
        let tolerance = CLOSED * b.abs() + f64::MIN_POSITIVE;
        let half = (c - b) / 2.0;
        if half.abs() <= tolerance || fb == 0.0 {
            return Some(b);
        }
        if previous.abs() >= tolerance && fa.abs() > fb.abs() {
            let s = fb / fa;
            // Only two distinct points are known after a bisection.
            let (mut p, mut q) = if (a - c).abs() <= 0.0 {
                (2.0 * half * s, 1.0 - s)
            } else {
                let (q, r) = (fa / fc, fb / fc);
                (s * (2.0 * half * q * (q - r) - (b - a) * (r - 1.0)), (q - 1.0) * (r - 1.0) * (s - 1.0))
            };
            if p > 0.0 {
                q = -q;
            } else {
                p = -p;
            }
            if 2.0 * p < (3.0 * half * q - (tolerance * q).abs()).min((previous * q).abs()) {
                previous = step;
                step = p / q;
            } else {
                step = half;
                previous = half;
            }
        } else {
            step = half;
            previous = half;
        }
        (a, fa) = (b, fb);
        b += if step.abs() > tolerance { step } else { tolerance.copysign(half) };
        fb = f(b);
    }
    Some(b)
}

/// Where a function with one maximum between `low` and `high` is highest, by golden-section search.
/// Good to about eight figures, which is what the flat top of a maximum allows.
pub fn summit(f: impl Fn(f64) -> f64, low: f64, high: f64) -> f64 {
    let golden = (5.0_f64.sqrt() - 1.0) / 2.0;
    let (mut low, mut high) = (low, high);
    let (mut left, mut right) = (high - golden * (high - low), low + golden * (high - low));
    let (mut f_left, mut f_right) = (f(left), f(right));
    for _ in 0..MOST_STEPS {
        if high - low <= 1e-12 * high.abs() {
            break;
        }
        if f_left < f_right {
            low = left;
            (left, f_left) = (right, f_right);
            right = low + golden * (high - low);
            f_right = f(right);
        } else {
            high = right;
            (right, f_right) = (left, f_left);
            left = high - golden * (high - low);
            f_left = f(left);
        }
    }
    f64::midpoint(low, high)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn finds_roots_known_in_closed_form() {
        // x³ = 2 and e^−x = 0.1, worked by hand.
        let cube = crossing(|x| x * x * x - 2.0, 0.0, 5.0).unwrap();
        assert!((cube - 2.0_f64.powf(1.0 / 3.0)).abs() < 1e-14);
        let decay = crossing(|x| (-x).exp() - 0.1, 0.0, 1000.0).unwrap();
        assert!((decay - 10.0_f64.ln()).abs() < 1e-13);
    }

    #[test]
    fn no_change_of_sign_is_no_root() {
        assert_eq!(crossing(|x| x * x + 1.0, -3.0, 3.0), None);
        assert_eq!(crossing(|_| f64::NAN, -3.0, 3.0), None);
        assert_eq!(crossing(|x| x, 0.0, 3.0), Some(0.0));
    }

    #[test]
    fn finds_the_top_of_a_parabola() {
        assert!((summit(|x| -(x - 3.25) * (x - 3.25), 0.0, 10.0) - 3.25).abs() < 1e-7);
    }
}
