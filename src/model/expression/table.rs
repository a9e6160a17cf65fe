//! Published tables as interpolation nodes: linear in one argument, bilinear in two.

/// A table of values at nodes, linear between them and held at its ends.
///
/// At a node the slope is that of the segment above; at the last node, and outside, that of the last
/// segment inside (0 outside, where the value is held).
#[derive(Clone, Debug, PartialEq)]
pub struct Table {
    name: String,
    first: Axis,
    /// A single node for a table of one argument.
    second: Axis,
    /// Row by row of the first argument.
    values: Vec<f64>,
}

/// The nodes of one argument, strictly increasing.
#[derive(Clone, Debug, PartialEq)]
pub struct Axis(Vec<f64>);

/// Where an argument lies among the nodes.
#[derive(Clone, Copy, Debug)]
struct Place {
    /// The node below.
    index: usize,
    /// The share of the way to the next, 0 to 1.
    share: f64,
    /// 1 / (next - below), or 0 where the value does not change.
    per_width: f64,
}

impl Axis {
    /// Nodes in strictly increasing order; `None` otherwise, or for none.
    pub fn new(nodes: Vec<f64>) -> Option<Self> {
        let increasing = nodes.windows(2).all(|pair| pair[0] < pair[1]);
        (increasing && !nodes.is_empty()).then_some(Self(nodes))
    }

    /// The argument is beyond either end. A single node has no beyond.
    #[inline]
    pub fn excludes(&self, at: f64) -> bool {
        let room = room(at);
        self.0.len() > 1 && !(self.0[0] - room..=self.0[self.0.len() - 1] + room).contains(&at)
    }

    /// The argument is a node, to rounding.
    pub fn has_node_at(&self, at: f64) -> bool {
        self.0.len() > 1 && self.0.iter().any(|node| (node - at).abs() <= room(at))
    }

    fn place(&self, at: f64) -> Place {
        let last = self.0.len() - 1;
        let room = room(at);
        if last == 0 || !(at >= self.0[0] - room) {
            return Place { index: 0, share: 0.0, per_width: 0.0 };
        }
        if at > self.0[last] + room {
            return Place { index: last - 1, share: 1.0, per_width: 0.0 };
        }
        // Counting has no branches to mispredict: published tables have few nodes.
        let index = self.0[1..last].iter().filter(|node| **node <= at + room).count();
        let width = self.0[index + 1] - self.0[index];
        Place { index, share: (at - self.0[index]) / width, per_width: 1.0 / width }
    }
}

/// An argument this near to a node is at it: a quotient such as 0.16/0.4 misses 0.4 by a bit.
#[inline]
fn room(at: f64) -> f64 {
    1e-12 * at.abs()
}

impl Table {
    /// A table of one argument. `None` unless there is a finite value for each node.
    pub fn line(name: &str, nodes: &[f64], values: &[f64]) -> Option<Self> {
        Self::grid(name, nodes, &[0.0], values)
    }

    /// A table of two arguments, values row by row of the first. `None` unless there is a finite value
    /// for each pair of nodes.
    pub fn grid(name: &str, first: &[f64], second: &[f64], values: &[f64]) -> Option<Self> {
        let complete = values.len() == first.len() * second.len()
            && values.iter().all(|value| value.is_finite());
        Some(Self {
            name: name.to_owned(),
            first: Axis::new(first.to_vec())?,
            second: Axis::new(second.to_vec())?,
            values: values.to_vec(),
        })
        .filter(|_| complete)
    }

    /// The same table under another name.
    #[must_use]
    pub fn renamed(self, name: String) -> Self {
        Self { name, ..self }
    }

    /// What equations call it.
    pub fn name(&self) -> &str {
        &self.name
    }

    /// The nodes of a table of one argument with their values.
    pub fn points(&self) -> impl Iterator<Item = (f64, f64)> {
        self.first.0.iter().copied().zip(self.values.iter().copied())
    }

    /// How many arguments it takes: 1 or 2.
    pub fn arguments(&self) -> usize {
        if self.second.0.len() > 1 { 2 } else { 1 }
    }

    /// The axes of its arguments.
    pub fn axes(&self) -> [&Axis; 2] {
        [&self.first, &self.second]
    }

    /// Either argument is beyond its nodes.
    #[inline]
    pub fn excludes(&self, at: [f64; 2]) -> bool {
        self.first.excludes(at[0]) || self.second.excludes(at[1])
    }

    /// The value (`order` 0, 0), or its derivative of the given order (0 or 1) by each argument.
    #[inline]
    pub fn look_up(&self, at: [f64; 2], order: [u8; 2]) -> f64 {
        if !(at[0].is_finite() && at[1].is_finite()) {
            return f64::NAN;
        }
        let first = self.first.place(at[0]);
        let columns = self.second.0.len();
        if columns == 1 {
            let last = self.values.len() - 1;
            return along(first, order[0], |i| self.values[i.min(last)]);
        }
        let second = self.second.place(at[1]);
        let row = |index: usize| {
            let values = &self.values[index * columns..(index + 1) * columns];
            along(second, order[1], |j| values[j.min(columns - 1)])
        };
        let last = self.first.0.len() - 1;
        along(first, order[0], |i| row(i.min(last)))
    }
}

/// Linear interpolation, or its slope, between the values at two neighbouring nodes.
#[inline]
fn along(place: Place, order: u8, value: impl Fn(usize) -> f64) -> f64 {
    let (below, above) = (value(place.index), value(place.index + 1));
    if order == 0 {
        // In this form both nodes give their printed value exactly.
        below * (1.0 - place.share) + above * place.share
    } else {
        (above - below) * place.per_width
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_line_interpolates_and_holds_its_ends() {
        let table = Table::line("a", &[0.0, 1.0, 3.0], &[10.0, 20.0, 0.0]).unwrap();
        let value = |at: f64| table.look_up([at, 0.0], [0, 0]);
        let slope = |at: f64| table.look_up([at, 0.0], [1, 0]);
        assert_eq!(
            [value(-1.0), value(0.5), value(1.0), value(2.0), value(9.0)],
            [10.0, 15.0, 20.0, 10.0, 0.0]
        );
        assert_eq!([slope(0.5), slope(1.0), slope(3.0)], [10.0, -10.0, -10.0]);
        assert_eq!([slope(-0.1), slope(3.1)], [0.0, 0.0]);
        assert!(table.excludes([3.1, 0.0]) && !table.excludes([3.0, 0.0]));
    }

    #[test]
    fn a_grid_is_bilinear() {
        let table = Table::grid("c", &[0.0, 2.0], &[0.0, 1.0], &[1.0, 2.0, 5.0, 10.0]).unwrap();
        assert_eq!(table.look_up([1.0, 0.5], [0, 0]), 4.5);
        assert_eq!(table.look_up([1.0, 0.5], [1, 0]), 3.0);
        assert_eq!(table.look_up([1.0, 0.5], [0, 1]), 3.0);
        assert_eq!(table.look_up([1.0, 0.5], [1, 1]), 2.0);
    }

    #[test]
    fn a_table_that_is_not_one_is_refused() {
        assert!(Table::line("a", &[0.0, 0.0], &[1.0, 2.0]).is_none());
        assert!(Table::line("a", &[0.0, 1.0], &[1.0]).is_none());
        assert!(Table::line("a", &[0.0, 1.0], &[1.0, f64::NAN]).is_none());
        assert!(Table::line("a", &[], &[]).is_none());
    }
}
