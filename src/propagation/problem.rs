//! All that is needed to propagate: a model, the values of its inputs, and what makes them wrong.

use super::{Correlation, Distribution};
use crate::model::Model;
use crate::model::expression::Id;

/// One named cause of error.
#[derive(Clone, Debug, PartialEq)]
pub struct Source {
    /// Its name: unique, and the key of its random numbers.
    pub name: String,
    /// What it does to the inputs.
    pub effects: Vec<Effect>,
    /// The distribution of its error: indicated minus true (VIM 2.16).
    pub distribution: Distribution,
    /// Degrees of freedom of its standard uncertainty; infinite if it is taken as exactly known.
    pub degrees_of_freedom: f64,
}

/// What a source does to one input.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Effect {
    /// The input, by its place in the model.
    pub input: usize,
    /// How.
    pub action: Action,
}

/// How an error `e` makes an input wrong.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Action {
    /// indicated = true + offset + gain e
    Shift {
        /// Unit of the input for each unit of the error.
        gain: f64,
        /// What this input is wrong by besides, whatever the error: a known bias that does not go with
        /// the gain.
        offset: f64,
    },
    /// The true value is the indicated one times (1 - e).
    Scale,
}

/// A model with the values that are indicated and the errors that they may have.
#[derive(Clone, Debug)]
pub struct Problem {
    /// The model.
    pub model: Model,
    /// The outputs asked for.
    pub outputs: Vec<Id>,
    /// The indicated value of each input.
    pub indicated: Vec<f64>,
    /// The sources.
    pub sources: Vec<Source>,
    /// Correlations between sources, by their places.
    pub correlations: Vec<Correlation>,
}

impl Problem {
    /// The inputs with the known biases taken out:
    /// (indicated - sum of mean shifts) times the product of (1 - mean scale errors).
    pub fn corrected(&self) -> Vec<f64> {
        corrected(&self.indicated, &self.sources)
    }

    /// The inputs' values for given errors of the sources.
    pub fn true_values(&self, error: impl Fn(usize) -> f64) -> Vec<f64> {
        true_values(&self.indicated, &self.sources, error)
    }

    /// Whether any source acts on an input.
    pub fn varies(&self, input: usize) -> bool {
        self.sources.iter().any(|source| source.effects.iter().any(|each| each.input == input))
    }

    /// For each input its indicated value if nothing acts on it, `None` if it varies.
    pub fn fixed(&self) -> Vec<Option<f64>> {
        self.indicated
            .iter()
            .enumerate()
            .map(|(input, value)| (!self.varies(input)).then_some(*value))
            .collect()
    }

    /// Sets of sources that are correlated with each other, directly or through others; a source that is
    /// correlated with none is a set of its own. In the order of their first member.
    pub fn groups(&self) -> Vec<Vec<usize>> {
        let mut group_of: Vec<usize> = (0..self.sources.len()).collect();
        for correlation in self.correlations.iter().filter(|each| each.coefficient != 0.0) {
            let [a, b] = correlation.sources.map(|source| group_of[source]);
            for group in &mut group_of {
                if *group == a.max(b) {
                    *group = a.min(b);
                }
            }
        }
        (0..self.sources.len())
            .map(|group| (0..self.sources.len()).filter(|s| group_of[*s] == group).collect())
            .filter(|members: &Vec<usize>| !members.is_empty())
            .collect()
    }

    /// The correlation coefficient of two sources.
    pub fn correlation(&self, a: usize, b: usize) -> f64 {
        if a == b {
            return 1.0;
        }
        self.correlations
            .iter()
            .find(|each| each.sources == [a, b] || each.sources == [b, a])
            .map_or(0.0, |each| each.coefficient)
    }
}

/// Indicated values with the known biases of their sources taken out.
pub fn corrected(indicated: &[f64], sources: &[Source]) -> Vec<f64> {
    let means: Vec<f64> = sources.iter().map(|source| source.distribution.mean()).collect();
    true_values(indicated, sources, |source| means[source])
}

fn true_values(indicated: &[f64], sources: &[Source], error: impl Fn(usize) -> f64) -> Vec<f64> {
    let mut values = indicated.to_vec();
    let mut factors = vec![1.0; values.len()];
    for (index, source) in sources.iter().enumerate() {
        for effect in &source.effects {
            match effect.action {
                Action::Shift { gain, offset } => {
                    values[effect.input] -= offset + gain * error(index);
                }
                Action::Scale => factors[effect.input] *= 1.0 - error(index),
            }
        }
    }
    values.iter().zip(factors).map(|(value, factor)| value * factor).collect()
}
