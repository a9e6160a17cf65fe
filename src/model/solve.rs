//! One equation with one unknown: the smallest root above the lower bound.

/// How many cells the range is searched in for the first change of sign.
const CELLS: u32 = 128;
/// More steps than bisection alone needs to exhaust the digits of a double.
const STEPS: u32 = 200;

/// The smallest root of `residual` between two bounds, or `None` where there is none; with `only_rising` the
/// smallest at which it rises through zero.
///
/// `residual` gives the value and its slope. The range is searched cell by cell for the first change of
/// sign, and a cell whose slopes point to a double dip towards zero is looked into, so that a pair of
/// close roots near the last possible solution is not stepped over; a cell of which one end has no value
/// is cut down to where the values begin or end. Inside the cell Newton's method runs, held to a bracket
/// that shrinks at every step, so that it cannot leave or cycle.
pub(super) fn smallest_root(
    residual: &mut dyn FnMut(f64) -> (f64, f64),
    lower: f64,
    upper: f64,
    only_rising: bool,
) -> Option<f64> {
    if !(lower.is_finite() && upper.is_finite() && lower <= upper) {
        return None;
    }
    let mut left = Place::at(residual, lower);
    if left.value == 0.0 {
        return Some(lower);
    }
    for cell in 1..=CELLS {
        let share = f64::from(cell) / f64::from(CELLS);
        let end = if cell == CELLS { upper } else { lower + (upper - lower) * share };
        let right = Place::at(residual, end);
        let cut = [left, right].map(|place| place.value.is_nan());
        let (from, to) = match cut {
            [false, true] => (left, edge(residual, left, right)),
            [true, false] => (edge(residual, right, left), right),
            _ => (left, right),
        };
        if let Some(root) = root_between(residual, from, to, only_rising) {
            return Some(root);
        }
        left = right;
    }
    None
}

/// A point with its residual and slope.
#[derive(Clone, Copy, Debug)]
struct Place {
    x: f64,
    value: f64,
    slope: f64,
}

impl Place {
    fn at(residual: &mut dyn FnMut(f64) -> (f64, f64), x: f64) -> Self {
        let (value, slope) = residual(x);
        Self { x, value, slope }
    }
}

/// The last point with a value, from one that has one towards one that has none.
fn edge(residual: &mut dyn FnMut(f64) -> (f64, f64), defined: Place, undefined: Place) -> Place {
    let (mut inside, mut outside) = (defined, undefined.x);
    for _ in 0..STEPS {
        let middle = inside.x + (outside - inside.x) / 2.0;
        if middle == inside.x || middle == outside {
            break;
        }
        let found = Place::at(residual, middle);
        if found.value.is_nan() {
            outside = middle;
        } else {
            inside = found;
        }
    }
    inside
}

/// The first root between two points with values.
fn root_between(
    residual: &mut dyn FnMut(f64) -> (f64, f64),
    left: Place,
    right: Place,
    only_rising: bool,
) -> Option<f64> {
    let around = left.value.abs().max(right.value.abs());
    let end = if left.value * right.value <= 0.0 {
        right.x
    } else if left.value * left.slope < 0.0 && right.value * right.slope > 0.0 {
        // The value first runs towards zero and then away from it: there may be two roots inside.
        let turn = turning_point(residual, left.x, right.x, left.value)?;
        if only_rising && left.value > 0.0 {
            // The first of the two falls through zero; the second is meant.
            let turned = residual(turn).0;
            let root = bracketed_newton(residual, turn, right.x, turned)?;
            return Some(root).filter(|root| is_root(residual, *root, around));
        }
        turn
    } else {
        return None;
    };
    if only_rising && left.value > 0.0 {
        return None;
    }
    let root = bracketed_newton(residual, left.x, end, left.value)?;
    Some(root).filter(|root| is_root(residual, *root, around))
}

/// A change of sign is no root where the residual jumps over zero: it is then far from it on both sides.
fn is_root(residual: &mut dyn FnMut(f64) -> (f64, f64), at: f64, around: f64) -> bool {
    const SMALL: f64 = 1e-4;

    residual(at).0.abs() <= SMALL * around
}

/// The point between where the residual turns, if it has crossed zero there.
fn turning_point(
    residual: &mut dyn FnMut(f64) -> (f64, f64),
    mut left: f64,
    mut right: f64,
    sign: f64,
) -> Option<f64> {
    for _ in 0..STEPS {
        let middle = left + (right - left) / 2.0;
        let (value, slope) = residual(middle);
        if value * sign <= 0.0 {
            return Some(middle);
        }
        if middle <= left || middle >= right {
            return None;
        }
        if slope * sign < 0.0 {
            left = middle;
        } else {
            right = middle;
        }
    }
    None
}

/// Newton's method inside a bracket whose ends have different signs; `at_left` is the value at the left.
fn bracketed_newton(
    residual: &mut dyn FnMut(f64) -> (f64, f64),
    mut left: f64,
    mut right: f64,
    at_left: f64,
) -> Option<f64> {
    let mut x = left + (right - left) / 2.0;
    for _ in 0..STEPS {
        let (value, slope) = residual(x);
        if !value.is_finite() {
            return None;
        }
        if value == 0.0 {
            return Some(x);
        }
        if value * at_left > 0.0 {
            left = x;
        } else {
            right = x;
        }
        let newton = x - value / slope;
        let next =
            if newton > left && newton < right { newton } else { left + (right - left) / 2.0 };
        if (next - x).abs() <= f64::EPSILON * x.abs() || next <= left || next >= right {
            return Some(next.clamp(left, right));
        }
        x = next;
    }
    Some(x)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_smallest_root_is_found_to_the_last_digits() {
        // (x - 1)(x - 1.5)(x - 3)
        let mut cubic = |x: f64| {
            let value = (x - 1.0) * (x - 1.5) * (x - 3.0);
            let slope = (x - 1.5) * (x - 3.0) + (x - 1.0) * (x - 3.0) + (x - 1.0) * (x - 1.5);
            (value, slope)
        };
        let root = smallest_root(&mut cubic, 0.0, 10.0, false).unwrap();
        assert!((root - 1.0).abs() < 4e-16);
    }

    #[test]
    fn two_roots_inside_one_cell_are_not_stepped_over() {
        let mut close = |x: f64| ((x - 0.5001) * (x - 0.5002), 2.0 * x - 1.0003);
        let root = smallest_root(&mut close, 0.0, 1.0, false).unwrap();
        assert!((root - 0.5001).abs() < 1e-12, "{root}");
    }

    #[test]
    fn a_jump_over_zero_is_no_root() {
        let mut step = |x: f64| (if x < 0.3 { -0.1 } else { x }, 1.0);
        assert_eq!(smallest_root(&mut step, 0.0, 1.0, false), None);
        // A root that comes after the jump is found.
        let mut later = |x: f64| (if x < 0.3 { -0.1 } else { 0.7 - x }, -1.0);
        assert!((smallest_root(&mut later, 0.0, 1.0, false).unwrap() - 0.7).abs() < 1e-15);
    }

    #[test]
    fn a_root_beside_an_undefined_stretch_is_found() {
        // No value below 0.301; roots at 0.302 (falling) and 0.305 (rising), all in one cell of 2.
        let mut half = |x: f64| {
            let value = if x < 0.301 { f64::NAN } else { (x - 0.302) * (x - 0.305) };
            (value, 2.0 * x - 0.607)
        };
        let first = smallest_root(&mut half, 0.0, 2.0, false).unwrap();
        assert!((first - 0.302).abs() < 1e-12, "{first}");
        let rising = smallest_root(&mut half, 0.0, 2.0, true).unwrap();
        assert!((rising - 0.305).abs() < 1e-12, "{rising}");
    }

    #[test]
    fn where_there_is_no_root_none_is_given() {
        assert_eq!(smallest_root(&mut |x| (x * x + 1.0, 2.0 * x), -3.0, 3.0, false), None);
        assert_eq!(smallest_root(&mut |_| (f64::NAN, f64::NAN), 0.0, 1.0, false), None);
        assert_eq!(smallest_root(&mut |x| (x, 1.0), 1.0, f64::INFINITY, false), None);
    }
}
