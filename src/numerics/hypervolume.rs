//! Exact hypervolume of a set of points to be minimised, in one to three dimensions.

/// Volume dominated by `points` inside the box below `reference`; every coordinate is the less the better.
/// Points that do not dominate the reference add nothing. One to three coordinates.
///
/// Two dimensions: a sweep. Three: slices along the last coordinate over a two-dimensional front kept sorted
/// (Fonseca, Paquete and López-Ibáñez, CEC 2006), O(n²) at worst.
pub fn hypervolume<const D: usize>(points: &[[f64; D]], reference: &[f64; D]) -> f64 {
    let mut inside: Vec<[f64; D]> = points
        .iter()
        .filter(|p| p.iter().zip(reference).all(|(x, r)| x < r))
        .copied()
        .collect();
    match D {
        0 => 0.0,
        1 => {
            let best = inside.iter().map(|p| p[0]).fold(reference[0], f64::min);
            reference[0] - best
        }
        2 => {
            let mut stair = Staircase::new(reference[0], reference[1]);
            for p in &inside {
                stair.add(p[0], p[1]);
            }
            stair.area
        }
        _ => {
            inside.sort_by(|a, b| a[2].total_cmp(&b[2]));
            let mut stair = Staircase::new(reference[0], reference[1]);
            let mut volume = 0.0;
            let mut level = reference[2];
            for p in &inside {
                if stair.area > 0.0 {
                    volume += stair.area * (p[2] - level);
                }
                level = p[2];
                stair.add(p[0], p[1]);
            }
            if stair.area > 0.0 {
                volume += stair.area * (reference[2] - level);
            }
            volume
        }
    }
}

/// The non-dominated points of the plane seen so far and the area they dominate.
struct Staircase {
    right: f64,
    top: f64,
    /// Rising in x, falling in y.
    corners: Vec<(f64, f64)>,
    area: f64,
}

impl Staircase {
    fn new(right: f64, top: f64) -> Self {
        Self {
            right,
            top,
            corners: Vec::new(),
            area: 0.0,
        }
    }

    fn add(&mut self, x: f64, y: f64) {
        let begin = self.corners.partition_point(|c| c.0 < x);
        let mut ceiling = if begin > 0 {
            self.corners[begin - 1].1
        } else {
            self.top
        };
        if ceiling <= y
            || self
                .corners
                .get(begin)
                .is_some_and(|c| c.0 == x && c.1 <= y)
        {
            return;
        }
        let mut end = begin;
        let mut left = x;
        while end < self.corners.len() && self.corners[end].1 >= y {
            self.area += (self.corners[end].0 - left) * (ceiling - y);
            left = self.corners[end].0;
            ceiling = self.corners[end].1;
            end += 1;
        }
        let next = self.corners.get(end).map_or(self.right, |c| c.0);
        self.area += (next - left) * (ceiling - y);
        self.corners.splice(begin..end, [(x, y)]);
    }
}

#[cfg(test)]
mod tests {
    use super::hypervolume;
    use proptest::prelude::*;

    /// A few hundred additions of numbers of order 1.
    const ROUNDING: f64 = 1e-12;

    /// Zitzler's and Deb's small examples (Zitzler, Deb and Thiele 2000), recomputed.
    #[test]
    fn published_small_sets() {
        let plane = [[1.0, 3.0], [2.0, 2.0], [3.0, 1.0]];
        assert_eq!(hypervolume(&plane, &[4.0, 4.0]), 6.0);
        let space = [[1.0, 2.0, 3.0], [2.0, 3.0, 1.0], [3.0, 1.0, 2.0]];
        assert_eq!(hypervolume(&space, &[4.0, 4.0, 4.0]), 13.0);
    }

    proptest! {
        #[test]
        fn law_agrees_with_inclusion_and_exclusion(
            points in proptest::collection::vec(proptest::array::uniform3(0.0..1.2f64), 0..9)
        ) {
            let mut expected = 0.0;
            for mask in 1u32..1 << points.len() {
                let mut corner = [f64::NEG_INFINITY; 3];
                for (i, p) in points.iter().enumerate() {
                    if mask >> i & 1 == 1 {
                        for d in 0..3 {
                            corner[d] = f64::max(corner[d], p[d]);
                        }
                    }
                }
                let volume: f64 = corner.iter().map(|x| (1.0 - x).max(0.0)).product();
                expected += if mask.count_ones() % 2 == 1 { volume } else { -volume };
            }
            prop_assert!((hypervolume(&points, &[1.0; 3]) - expected).abs() < ROUNDING);
        }
    }
}
