//! Correlation coefficients: whether they can hold together, and drawing by them.

use thiserror::Error;

use super::Problem;

/// A stated correlation coefficient of two sources.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Correlation {
    /// The two sources, by their places.
    pub sources: [usize; 2],
    /// The coefficient, -1 to 1.
    pub coefficient: f64,
}

/// Coefficients that no set of errors can have together.
#[derive(Clone, Copy, Debug, PartialEq, Error)]
#[error("these correlation coefficients cannot hold together")]
pub struct ImpossibleCorrelation {
    /// The pair at which it shows: its coefficient is at odds with those of the sources before.
    pub pair: [usize; 2],
}

/// Room for the rounding of the factorisation, against variances of 1.
const ROUNDING: f64 = 1e-10;

/// The pair whose coefficient is at odds with the others, if the correlation matrix is not positive
/// semi-definite. A coefficient of 1 or -1 is possible.
pub fn impossible(problem: &Problem) -> Option<ImpossibleCorrelation> {
    problem.groups().iter().find_map(|group| factor(problem, group).err())
}

/// The lower triangular factor of a group's correlation matrix, row by row: with independent z of
/// variance 1, the sums of row times z have the stated correlations (JCGM 101 C.5).
///
/// The matrix may be singular: a row that is determined by those before it has 0 on its diagonal.
pub(super) fn factor(
    problem: &Problem,
    group: &[usize],
) -> Result<Vec<Vec<f64>>, ImpossibleCorrelation> {
    let mut rows: Vec<Vec<f64>> = Vec::with_capacity(group.len());
    for (i, source) in group.iter().enumerate() {
        let mut row = vec![0.0; i + 1];
        for j in 0..i {
            let explained: f64 = (0..j).map(|k| row[k] * rows[j][k]).sum();
            let rest = problem.correlation(*source, group[j]) - explained;
            if rows[j][j] > ROUNDING.sqrt() {
                row[j] = rest / rows[j][j];
            } else if rest.abs() > ROUNDING.sqrt() {
                // The earlier source is determined by others that this one does not follow.
                return Err(ImpossibleCorrelation { pair: [group[j], *source] });
            }
        }
        let variance = 1.0 - row[..i].iter().map(|each| each * each).sum::<f64>();
        if variance < -ROUNDING {
            let stated = |j: &usize| problem.correlation(*source, group[*j]).abs();
            let worst = (0..i).max_by(|a, b| stated(a).total_cmp(&stated(b))).unwrap_or(0);
            return Err(ImpossibleCorrelation { pair: [group[worst], *source] });
        }
        row[i] = variance.max(0.0).sqrt();
        rows.push(row);
    }
    Ok(rows)
}
