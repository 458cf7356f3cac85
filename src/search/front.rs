//! Pareto dominance over efficiency, output power and area; filtering and even spread.

use crate::study::Objective;

/// A point's objectives as costs, each the less the better: −efficiency, −output power, area; 0 for one not traded.
pub type Costs = [f64; 3];

/// Costs of a design by the objectives in play.
pub fn costs(
    objectives: &[Objective],
    efficiency: f64,
    output_power_w: f64,
    area_m2: f64,
) -> Costs {
    let of = |o: Objective, v: f64| if objectives.contains(&o) { v } else { 0.0 };
    [
        of(Objective::Efficiency, -efficiency),
        of(Objective::OutputPower, -output_power_w),
        of(Objective::Area, area_m2),
    ]
}

/// Whether `a` is at least as good in everything and better in something.
pub fn dominates(a: &Costs, b: &Costs) -> bool {
    a.iter().zip(b).all(|(x, y)| x <= y) && a != b
}

/// Indices of the non-dominated points, in their order; of equal points the first.
///
/// Points are taken in lexicographic order, so a point can be dominated only by one already kept.
pub fn non_dominated(points: &[Costs]) -> Vec<usize> {
    let mut order: Vec<usize> = (0..points.len()).collect();
    order.sort_by(|&a, &b| lexicographic(&points[a], &points[b]).then(a.cmp(&b)));
    let mut kept: Vec<usize> = Vec::new();
    // Rising first cost: what decides is the plane of the other two, a staircase of (second, third).
    let mut stair: Vec<(f64, f64)> = Vec::new();
    for index in order {
        let (y, z) = (points[index][1], points[index][2]);
        let at = stair.partition_point(|s| s.0 <= y);
        if at > 0 && stair[at - 1].1 <= z {
            continue;
        }
        kept.push(index);
        let begin = stair.partition_point(|s| s.0 < y);
        let end = begin + stair[begin..].partition_point(|s| s.1 >= z);
        stair.splice(begin..end, [(y, z)]);
    }
    kept.sort_unstable();
    kept
}

fn lexicographic(a: &Costs, b: &Costs) -> std::cmp::Ordering {
    a.iter()
        .zip(b)
        .map(|(x, y)| x.total_cmp(y))
        .find(|o| o.is_ne())
        .unwrap_or(std::cmp::Ordering::Equal)
}

/// Thins clumps: indices of points no two of which are closer than `spacing` in every cost, costs measured in the span of
/// the whole set. The best of each cost always stays.
pub fn spread(points: &[Costs], spacing: f64) -> Vec<usize> {
    let mut low = [f64::INFINITY; 3];
    let mut high = [f64::NEG_INFINITY; 3];
    for p in points {
        for d in 0..3 {
            low[d] = low[d].min(p[d]);
            high[d] = high[d].max(p[d]);
        }
    }
    let scaled = |p: &Costs| {
        let mut q = [0.0; 3];
        for d in 0..3 {
            if high[d] > low[d] {
                q[d] = (p[d] - low[d]) / (high[d] - low[d]);
            }
        }
        q
    };
    let mut order: Vec<usize> = Vec::new();
    for d in 0..3 {
        let best = (0..points.len()).min_by(|&a, &b| {
            points[a][d]
                .total_cmp(&points[b][d])
                .then(lexicographic(&points[a], &points[b]))
        });
        order.extend(best.filter(|b| !order.contains(b)));
    }
    let extremes = order.len();
    let mut rest: Vec<usize> = (0..points.len()).filter(|i| !order.contains(i)).collect();
    rest.sort_by(|&a, &b| lexicographic(&points[a], &points[b]).then(a.cmp(&b)));
    order.extend(rest);
    let mut kept: Vec<(usize, Costs)> = Vec::new();
    for (rank, index) in order.into_iter().enumerate() {
        let q = scaled(&points[index]);
        let crowded = kept
            .iter()
            .any(|(_, k)| k.iter().zip(&q).all(|(x, y)| (x - y).abs() < spacing));
        if rank < extremes || !crowded {
            kept.push((index, q));
        }
    }
    let mut indices: Vec<usize> = kept.into_iter().map(|(i, _)| i).collect();
    indices.sort_unstable();
    indices
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    proptest! {
        #[test]
        fn law_the_filter_agrees_with_all_pairs(
            coarse in proptest::collection::vec(proptest::array::uniform3(0u8..6), 0..40)
        ) {
            // Few levels, so that ties and equal points occur.
            let points: Vec<Costs> = coarse.iter().map(|p| p.map(f64::from)).collect();
            let expected: Vec<usize> = (0..points.len())
                .filter(|&i| {
                    !points.iter().any(|q| dominates(q, &points[i]))
                        && !points[..i].contains(&points[i])
                })
                .collect();
            prop_assert_eq!(non_dominated(&points), expected);
        }

        #[test]
        fn law_spread_keeps_extremes_and_no_clump(
            points in proptest::collection::vec(proptest::array::uniform3(0.0..1.0f64), 1..60)
        ) {
            let kept = spread(&points, 0.2);
            for d in 0..3 {
                let best = points.iter().map(|p| p[d]).fold(f64::INFINITY, f64::min);
                prop_assert!(kept.iter().any(|&i| points[i][d] == best));
            }
            // Every point left out has a kept one near it.
            for (i, p) in points.iter().enumerate() {
                let near = kept.iter().any(|&k| points[k].iter().zip(p).all(|(x, y)| (x - y).abs() < 0.2));
                prop_assert!(kept.contains(&i) || near);
            }
        }
    }
}
