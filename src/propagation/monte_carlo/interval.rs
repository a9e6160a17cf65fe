//! Coverage intervals from trials, by order statistics (JCGM 101 7.7).

/// Both coverage intervals.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Intervals {
    /// Equal probability beyond either end.
    pub symmetric: [f64; 2],
    /// The shortest; one of several where the distribution is flat or has two peaks.
    pub shortest: [f64; 2],
}

/// Coverage intervals of finite values; their order is changed. `None` for fewer than two values.
///
/// With M values and q = int(p M + 1/2), an interval is [y_(r), y_(r+q)]; symmetric for
/// r = (M - q)/2, or int((M - q + 1)/2) where that is no whole number; shortest for the r that gives
/// the smallest length (7.7.2).
pub fn intervals(values: &mut [f64], probability: f64) -> Option<Intervals> {
    let count = values.len();
    if count < 2 {
        return None;
    }
    // p M may carry a rounding error where it is whole: a hair is taken off before the half is added.
    let wanted = (probability * count as f64 + 0.5 - 1e-9).floor() as usize;
    let inside = wanted.clamp(1, count - 1);
    let outside = count - inside;
    let (lower, upper) = tails(values, outside);
    let symmetric = if outside.is_multiple_of(2) { outside / 2 } else { outside.div_ceil(2) };
    let length = |r: &usize| upper[*r] - lower[*r];
    let shortest = (0..outside).min_by(|a, b| length(a).total_cmp(&length(b))).unwrap_or(0);
    let at = |r: usize| [lower[r], upper[r]];
    // r counts from 1.
    Some(Intervals { symmetric: at(symmetric.max(1) - 1), shortest: at(shortest) })
}

/// The smallest and the largest `outside` values, each sorted; the middle is not.
fn tails(values: &mut [f64], outside: usize) -> (Vec<f64>, Vec<f64>) {
    let count = values.len();
    // For a low probability the tails overlap, and the whole is sorted.
    if 2 * outside >= count {
        values.sort_unstable_by(f64::total_cmp);
    } else {
        values.select_nth_unstable_by(outside - 1, f64::total_cmp);
        let rest = &mut values[outside..];
        rest.select_nth_unstable_by(count - 2 * outside, f64::total_cmp);
        values[..outside].sort_unstable_by(f64::total_cmp);
        values[count - outside..].sort_unstable_by(f64::total_cmp);
    }
    (values[..outside].to_vec(), values[count - outside..].to_vec())
}

#[cfg(test)]
mod tests {
    use super::*;

    /// JCGM 101 7.7.2: for p = 0.95 and M = 1e5, q = 95 000 and r = 2 500.
    #[test]
    fn indices_are_those_of_the_guide() {
        let mut values: Vec<f64> = (1..=100_000).map(f64::from).collect();
        values.reverse();
        let found = intervals(&mut values, 0.95).unwrap();
        assert_eq!(found.symmetric, [2500.0, 97_500.0]);
        assert_eq!(found.shortest[1] - found.shortest[0], 95_000.0);
    }

    #[test]
    fn tails_that_overlap_give_the_same_as_a_full_sort() {
        let mut values: Vec<f64> = (0..1000).map(|i| f64::from(i * 7919 % 1000)).collect();
        let found = intervals(&mut values, 0.3).unwrap();
        // q = 300, r = 350: counting from 1 the values are 0..999.
        assert_eq!(found.symmetric, [349.0, 649.0]);
    }

    #[test]
    fn hardly_any_values_give_no_interval() {
        assert_eq!(intervals(&mut [1.0], 0.95), None);
        assert!(intervals(&mut [1.0, 2.0], 0.95).is_some());
    }
}
