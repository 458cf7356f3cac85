//! One root of an increasing function in a bracket.

/// Root of `f`, given as `(value, slope)`, between `low` (`f ≤ 0`) and `high` (`f ≥ 0`): Newton's method kept inside a
/// shrinking bracket, to the last bits. `None` when `f` is not finite somewhere on the way, or the bracket is none.
pub fn increasing_root(
    mut low: f64,
    mut high: f64,
    start: f64,
    f: impl Fn(f64) -> (f64, f64),
) -> Option<f64> {
    /// Bisection alone would need about 60 halvings to the last bit; Newton needs few.
    const MOST_STEPS: usize = 100;
    if low.is_nan() || high.is_nan() || low > high {
        return None;
    }
    let mut x = start.clamp(low, high);
    for _ in 0..MOST_STEPS {
        let (value, slope) = f(x);
        if !value.is_finite() {
            return None;
        }
        if value == 0.0 {
            return Some(x);
        }
        if value < 0.0 {
            low = x;
        } else {
            high = x;
        }
        let newton = x - value / slope;
        let next = if newton > low && newton < high {
            newton
        } else {
            0.5 * (low + high)
        };
        if (next - x).abs() <= 2.0 * f64::EPSILON * x.abs() {
            return Some(next);
        }
        x = next;
    }
    Some(x)
}

#[cfg(test)]
mod tests {
    use super::increasing_root;

    #[test]
    fn law_finds_roots_of_smooth_and_of_steep_functions() {
        let cube = increasing_root(0.0, 10.0, 9.0, |x| (x * x * x - 2.0, 3.0 * x * x)).unwrap();
        assert!((cube - 2f64.cbrt()).abs() < 4.0 * f64::EPSILON);
        let steep = increasing_root(0.0, 10.0, 10.0, |x| ((x - 3.0).tanh(), 0.0)).unwrap();
        assert!((steep - 3.0).abs() < 1e-14);
        assert!(increasing_root(0.0, 1.0, 0.5, |_| (f64::NAN, 1.0)).is_none());
    }

    #[test]
    fn law_what_is_no_bracket_has_no_root() {
        let line = |x: f64| (x, 1.0);
        for (low, high) in [(0.0, f64::NAN), (f64::NAN, 1.0), (1.0, -1.0)] {
            assert_eq!(increasing_root(low, high, 0.5, line), None);
        }
        assert_eq!(increasing_root(-1.0, 1.0, f64::NAN, line), None);
        assert_eq!(increasing_root(-1.0, 1.0, 0.5, |_| (f64::NAN, 1.0)), None);
    }
}
