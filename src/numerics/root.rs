//! One root of an increasing function in a bracket.

/// Root of `f`, given as `(value, slope)`, between `low` (`f ≤ 0`) and `high` (`f ≥ 0`), to the last bits: Newton's method
/// inside a shrinking bracket, which is halved where a step would not be half of that before the last (Dekker 1969; on
/// the side of a steep exponential Newton's steps are all alike). `None` when `f` is not finite somewhere on the way, or the bracket is none.
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
    let [mut before_last, mut last] = [high - low; 2];
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
        let shrinks = (newton - x).abs() <= 0.5 * before_last;
        let next = if newton > low && newton < high && shrinks {
            newton
        } else {
            0.5 * (low + high)
        };
        (before_last, last) = (last, (next - x).abs());
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
        // Newton's steps from 690 are of 1 each.
        let wall = increasing_root(0.0, 900.0, 690.0, |x| (x.exp() - 2.0, x.exp())).unwrap();
        assert!((wall - std::f64::consts::LN_2).abs() < 4.0 * f64::EPSILON);
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
