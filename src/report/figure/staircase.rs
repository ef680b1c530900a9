//! Labels over a drawing with upright leaders, in two staircases, so that no leader crosses a
//! label.
//!
//! Those left of a dividing place hang to the right of their leaders, the leftmost highest; those
//! right of it hang to the left, the rightmost highest. All ways to divide and to shift the two
//! staircases are tried, the flattest that holds is taken.

/// One label to place.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Hung {
    /// Where its leader goes down.
    pub x: f64,
    /// How wide its words are at most.
    pub width: f64,
}

/// Where one label goes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Place {
    /// Row from the top, from 0.
    pub row: usize,
    /// Whether the words stand right of the leader.
    pub rightward: bool,
}

/// Distance of the words from their leader.
pub const GAP: f64 = 5.0;

/// Rows for `items`, which are sorted by `x`, in a drawing `across` wide; also how many rows.
/// `None` where no arrangement holds.
pub fn arrange(items: &[Hung], across: f64) -> Option<(Vec<Place>, usize)> {
    let n = items.len();
    if n == 0 {
        return Some((Vec::new(), 0));
    }
    let mut best: Option<(Vec<Place>, usize)> = None;
    for split in 0..=n {
        for left_shift in 0..=n - split {
            for right_shift in 0..=split {
                let rows = (split + left_shift).max(n - split + right_shift);
                if best.as_ref().is_some_and(|(_, fewest)| rows >= *fewest) {
                    continue;
                }
                let places: Vec<Place> = (0..n)
                    .map(|index| {
                        if index < split {
                            Place { row: index + left_shift, rightward: true }
                        } else {
                            Place { row: n - 1 - index + right_shift, rightward: false }
                        }
                    })
                    .collect();
                if holds(items, &places, across) {
                    best = Some((places, rows));
                }
            }
        }
    }
    best
}

fn holds(items: &[Hung], places: &[Place], across: f64) -> bool {
    let span = |index: usize| {
        let item = items[index];
        if places[index].rightward {
            (item.x + GAP, item.x + GAP + item.width)
        } else {
            (item.x - GAP - item.width, item.x - GAP)
        }
    };
    (0..items.len()).all(|a| {
        let (left, right) = span(a);
        left >= 0.0
            && right <= across
            && (0..items.len()).filter(|&b| b != a).all(|b| {
                let (other_left, other_right) = span(b);
                let words_meet =
                    places[a].row == places[b].row && left < other_right + 8.0 && other_left < right + 8.0;
                // A leader stands from its own row downwards.
                let leader_crosses =
                    places[b].row <= places[a].row && items[b].x > left - 4.0 && items[b].x < right + 4.0;
                !words_meet && !leader_crosses
            })
    })
}

/// Centres of blocks of given heights, as near to the wanted ones as they can be without meeting,
/// none above `top`. Input and output from top to bottom.
pub fn spread(blocks: &[(f64, f64)], top: f64) -> Vec<f64> {
    // Blocks that meet merge into clusters that sit at the mean of what their members want.
    struct Cluster {
        members: Vec<usize>,
        centre: f64,
        height: f64,
    }
    let mut clusters: Vec<Cluster> = Vec::new();
    for (index, (wanted, height)) in blocks.iter().enumerate() {
        let centre = wanted.max(top + height / 2.0);
        clusters.push(Cluster { members: vec![index], centre, height: *height });
        while clusters.len() > 1 {
            let last = clusters.len() - 1;
            let (above, below) = (&clusters[last - 1], &clusters[last]);
            if above.centre + above.height / 2.0 <= below.centre - below.height / 2.0 {
                break;
            }
            let Some(below) = clusters.pop() else { break };
            if let Some(above) = clusters.last_mut() {
                let (a, b) = (above.members.len() as f64, below.members.len() as f64);
                let height = above.height + below.height;
                above.centre = ((above.centre * a + below.centre * b) / (a + b)).max(top + height / 2.0);
                above.height = height;
                above.members.extend(below.members);
            }
        }
    }
    let mut out = vec![0.0; blocks.len()];
    for cluster in clusters {
        let mut y = cluster.centre - cluster.height / 2.0;
        for member in cluster.members {
            out[member] = y + blocks[member].1 / 2.0;
            y += blocks[member].1;
        }
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn labels_at_both_edges_hang_inwards() {
        let items = [Hung { x: 10.0, width: 120.0 }, Hung { x: 390.0, width: 120.0 }];
        let (places, rows) = arrange(&items, 400.0).expect("room enough");
        assert!(places[0].rightward && !places[1].rightward);
        assert_eq!(rows, 1);
    }

    #[test]
    fn close_leaders_make_stairs() {
        let items: Vec<Hung> = (0..4).map(|i| Hung { x: 20.0 + 15.0 * f64::from(i), width: 150.0 }).collect();
        let (places, rows) = arrange(&items, 400.0).expect("room enough");
        assert_eq!(rows, 4);
        assert!(places.windows(2).all(|pair| pair[0].row < pair[1].row));
    }

    #[test]
    fn what_is_too_wide_has_no_arrangement() {
        assert!(arrange(&[Hung { x: 100.0, width: 390.0 }], 400.0).is_none());
    }

    #[test]
    fn blocks_that_meet_are_pushed_apart_evenly() {
        assert_eq!(spread(&[(50.0, 20.0), (55.0, 20.0)], 0.0), [42.5, 62.5]);
        assert_eq!(spread(&[(5.0, 20.0), (200.0, 20.0)], 0.0), [10.0, 200.0]);
    }
}
