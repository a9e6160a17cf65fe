//! A station at one head: the problem to propagate, and what each of its sources is in the file.

use thiserror::Error;

use super::file::{Station, observations_name};
use super::size::Size;
use super::source::ErrorSource;
use super::structure::{Evidence, Kind, StationInput, mean, standard_deviation};
use crate::diagnostic::{Code, Warning};
use crate::model::structures::{AutomaticSource, Regime, Structure, Values};
use crate::model::{Citation, Confidence, Fault, Model, Outcome};
use crate::propagation::{Action, Correlation, Distribution, Effect, Problem, Source};

/// A station at one head.
#[derive(Clone, Debug)]
pub struct Setting {
    /// What is propagated; its output is the result.
    pub problem: Problem,
    /// For each source of the problem, in the same order.
    pub rows: Vec<SourceRow>,
    /// The structure and the form of its equation; `None` for an equation of the user's own.
    pub regime: Option<(&'static Structure, &'static Regime)>,
    /// What is doubtful about the question at this head.
    pub warnings: Vec<Warning>,
}

/// A structure and the form of its equation that holds.
type Form = (&'static Structure, &'static Regime);

/// What a source of a problem is in the file.
#[derive(Clone, Debug, PartialEq)]
pub struct SourceRow {
    /// The keys of the inputs it acts on.
    pub acts_on: Vec<String>,
    /// Whether it scales its inputs: its error is then a fraction, not in their unit.
    pub scales: bool,
    /// The SI unit of its error.
    pub unit: String,
    /// Its size as stated.
    pub size: String,
    /// When a new draw is made, in words.
    pub fixed_until: String,
    /// What stands behind it.
    pub evidence: Evidence,
    /// Who published it, for an automatic source.
    pub published: Option<(Citation, Confidence)>,
    /// The automatic source whose place it takes.
    pub replaces: Option<String>,
    /// A correction that the file states as such: no row of the budget.
    pub is_correction: bool,
}

/// A shift by the error itself.
const PLAIN_SHIFT: Action = Action::Shift { gain: 1.0, offset: 0.0 };

/// The name of the correction that `[head] zero_above_crest` makes.
pub(super) const SURVEYED_ZERO: &str = "surveyed zero";

/// Why a station gives no answer at a head.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum Refusal {
    /// A head is needed and none is stated.
    #[error("no head is stated: give --head, or a range in [head]")]
    NoHead,
    /// A head is given to an equation that reads none.
    #[error("this equation reads no head")]
    HeadNotRead,
    /// The equation cannot be built, which reading rules out.
    #[error("the equation cannot be built: {}", .0.first().map(ToString::to_string).unwrap_or_default())]
    Equation(Vec<Fault>),
    /// No water passes the crest.
    #[error("no water passes the crest at an indicated head of {0} m, known biases taken out")]
    Dry(f64),
    /// The equation has no solution here.
    #[error("the equation has no value here: {0}")]
    NoSolution(String),
    /// No head gives the flow.
    #[error("no head up to {highest} m gives a flow of {flow} m3/s")]
    NoHeadForFlow {
        /// The flow, m3/s.
        flow: f64,
        /// The highest head that was tried, m.
        highest: f64,
    },
}

impl Station {
    /// The station at an indicated head (for an equation that reads none, `None`).
    ///
    /// `month`, 1 to 12, leaves out the sources that are not there in that month.
    ///
    /// # Errors
    ///
    /// [`Refusal`] where there is no head to work at, or one too many.
    pub fn at(&self, head: Option<f64>, month: Option<u32>) -> Result<Setting, Refusal> {
        match (&self.head, head) {
            (Some(_), None) => return Err(Refusal::NoHead),
            (None, Some(_)) => return Err(Refusal::HeadNotRead),
            _ => {}
        }
        let indicated = |input: &StationInput| match input.key.as_str() {
            "head" => head,
            _ => input.value,
        };
        let (mut model, regime) = self.model(&indicated)?;
        let mut inputs: Vec<f64> =
            self.inputs.iter().map(|input| indicated(input).unwrap_or(f64::NAN)).collect();
        // A width that is left out does not enter the equation; no value of it may spread as NaN.
        inputs.iter_mut().filter(|value| value.is_nan()).for_each(|value| *value = 0.0);
        let mut builder = Builder {
            station: self,
            indicated: &inputs,
            sources: Vec::new(),
            rows: Vec::new(),
            warnings: Vec::new(),
        };
        builder.stated(month);
        builder.surveyed_zero();
        builder.observed();
        let Builder { mut sources, mut rows, mut warnings, .. } = builder;
        if let Some((structure, form)) = regime {
            let known = Problem {
                outputs: vec![model.result()],
                model: model.clone(),
                indicated: inputs.clone(),
                sources: sources.clone(),
                correlations: Vec::new(),
            };
            self.published(
                &mut model,
                structure,
                form,
                &known.corrected(),
                &mut sources,
                &mut rows,
            );
        }
        let correlations = self.correlate(&sources, &mut warnings);
        let problem = Problem {
            outputs: vec![model.result()],
            model,
            indicated: inputs,
            sources,
            correlations,
        };
        Ok(Setting { problem, rows, regime, warnings })
    }

    fn model(
        &self,
        indicated: &dyn Fn(&StationInput) -> Option<f64>,
    ) -> Result<(Model, Option<Form>), Refusal> {
        match &self.kind {
            Kind::Own(equation) => {
                Ok((Model::build(&equation.blueprint).map_err(Refusal::Equation)?, None))
            }
            Kind::Catalogue(structure) => {
                let values: Vec<(&'static str, Option<f64>)> = structure
                    .all_inputs()
                    .iter()
                    .zip(&self.inputs)
                    .map(|(spec, input)| (spec.key, indicated(input)))
                    .collect();
                let regime = (structure.regime_for)(&Values(&values));
                let model =
                    Model::build(&structure.blueprint(regime)).map_err(Refusal::Equation)?;
                Ok((model, Some((structure, &structure.regimes[regime]))))
            }
        }
    }

    /// The sources that the structure brings with it, at the corrected inputs.
    fn published(
        &self,
        model: &mut Model,
        structure: &'static Structure,
        form: &'static Regime,
        corrected: &[f64],
        sources: &mut Vec<Source>,
        rows: &mut Vec<SourceRow>,
    ) {
        let replaced =
            |name: &str| self.sources.iter().any(|source| source.replaces.as_deref() == Some(name));
        for automatic in structure.automatic_sources(form) {
            let AutomaticSource { name, acts_on, rule, scales, words, published } = automatic;
            let Some(input) = model.input(acts_on).filter(|_| !replaced(name)) else { continue };
            let Ok((rule, _)) = model.expression(rule) else { continue };
            let (values, _) = model.evaluate(&[rule], corrected);
            // Published at 95 %: half of it is the standard uncertainty, and per cent are hundredths.
            let standard_uncertainty = values[0] * if scales { 0.5 / 100.0 } else { 1.0 };
            let action = if scales { Action::Scale } else { PLAIN_SHIFT };
            let size = if scales {
                format!("{} % at 95 %", round_digits(values[0]))
            } else {
                words.to_owned()
            };
            sources.push(Source {
                name: name.to_owned(),
                effects: vec![Effect { input, action }],
                distribution: Distribution::Normal { mean: 0.0, standard_uncertainty },
                degrees_of_freedom: f64::INFINITY,
            });
            rows.push(SourceRow {
                acts_on: vec![acts_on.to_owned()],
                scales,
                unit: if scales { "1".to_owned() } else { "m".to_owned() },
                size,
                fixed_until: "rebuilding".to_owned(),
                evidence: Evidence::default(),
                published: Some(published),
                replaces: None,
                is_correction: false,
            });
        }
    }

    fn correlate(&self, sources: &[Source], warnings: &mut Vec<Warning>) -> Vec<Correlation> {
        let place = |name: &String| sources.iter().position(|source| source.name == *name);
        let correlations: Vec<Correlation> = self
            .correlations
            .iter()
            .filter_map(|([a, b], coefficient)| {
                Some(Correlation { sources: [place(a)?, place(b)?], coefficient: *coefficient })
            })
            .collect();
        let shaped: Vec<&str> = sources
            .iter()
            .enumerate()
            .filter(|(index, source)| {
                correlations.iter().any(|c| c.coefficient != 0.0 && c.sources.contains(index))
                    && !source.distribution.is_normal()
            })
            .map(|(_, source)| source.name.as_str())
            .collect();
        if !shaped.is_empty() {
            warnings.push(Warning::new(
                Code::CorrelatedAsNormal,
                format!(
                    "drawn as normal because they are correlated (JCGM 101 6.4.8): {}",
                    shaped.join(", ")
                ),
            ));
        }
        correlations
    }

    /// What became of the equation at the corrected inputs, as a refusal if it has no value.
    ///
    /// # Errors
    ///
    /// [`Refusal::Dry`] and [`Refusal::NoSolution`].
    pub fn check_outcome(
        &self,
        outcome: Outcome,
        head: Option<f64>,
        values_are_finite: bool,
    ) -> Result<(), Refusal> {
        match outcome {
            Outcome::Dry => Err(Refusal::Dry(head.unwrap_or(f64::NAN))),
            Outcome::Undefined => Err(Refusal::NoSolution(
                match self.kind {
                    Kind::Catalogue(_) => "critical flow cannot pass at this head",
                    Kind::Own(_) => {
                        "its unknown has no root in its range, or a division by 0, or a root or \
                         logarithm of a negative number, is asked for"
                    }
                }
                .to_owned(),
            )),
            _ if !values_are_finite => {
                Err(Refusal::NoSolution("its slope is infinite at these values".to_owned()))
            }
            _ => Ok(()),
        }
    }
}

/// Two decimals, for a per cent in words.
fn round_digits(value: f64) -> f64 {
    (value * 100.0).round() / 100.0
}

/// Collects the sources that a file states.
struct Builder<'s> {
    station: &'s Station,
    indicated: &'s [f64],
    sources: Vec<Source>,
    rows: Vec<SourceRow>,
    warnings: Vec<Warning>,
}

impl Builder<'_> {
    fn stated(&mut self, month: Option<u32>) {
        for stated in &self.station.sources {
            if let Some(month) = month
                && !stated.months.is_empty()
                && !stated.months.contains(&month)
            {
                continue;
            }
            if month.is_none() && !stated.months.is_empty() {
                self.warnings.push(Warning::new(
                    Code::SeasonalSource,
                    format!(
                        "`{}` is there in months {} only; it is counted here. --month asks for one \
                         month",
                        stated.name,
                        stated.months.iter().map(u32::to_string).collect::<Vec<_>>().join(", ")
                    ),
                ));
            }
            self.add_stated(stated);
        }
    }

    fn add_stated(&mut self, stated: &ErrorSource) {
        let first = stated.inputs[0];
        let value = self.indicated[first];
        let distribution = stated.distribution(value);
        let scales = stated.kind == Size::Scale;
        let effects = stated
            .inputs
            .iter()
            .map(|input| Effect {
                input: *input,
                action: match stated.kind {
                    Size::Scale => Action::Scale,
                    Size::Shift => PLAIN_SHIFT,
                    // The size depends on the input's value: the others move in proportion to theirs.
                    Size::Mixed => self.mixed_shift(stated, *input),
                },
            })
            .collect();
        self.sources.push(Source {
            name: stated.name.clone(),
            effects,
            distribution,
            degrees_of_freedom: stated.degrees_of_freedom,
        });
        self.rows.push(SourceRow {
            acts_on: stated.inputs.iter().map(|i| self.station.inputs[*i].key.clone()).collect(),
            scales,
            unit: self.unit(first, scales),
            size: stated.size_text.clone(),
            fixed_until: stated.fixed_until.words(),
            evidence: stated.evidence.clone(),
            published: None,
            replaces: stated.replaces.clone(),
            is_correction: false,
        });
    }

    /// How an input goes with a source whose size depends on each input's value: its spread in proportion,
    /// its bias as its own sum says.
    fn mixed_shift(&self, stated: &ErrorSource, input: usize) -> Action {
        let of = |input: usize| stated.distribution(self.indicated[input]);
        let (first, this) = (of(stated.inputs[0]), of(input));
        let spread = first.standard_uncertainty();
        let gain = if spread > 0.0 { this.standard_uncertainty() / spread } else { 0.0 };
        if input == stated.inputs[0] {
            return PLAIN_SHIFT;
        }
        Action::Shift { gain, offset: this.mean() - gain * first.mean() }
    }

    fn unit(&self, input: usize, scales: bool) -> String {
        if scales { "1".to_owned() } else { self.station.inputs[input].dimension.to_string() }
    }

    /// A surveyed zero is a known bias of the head: a zero below the crest makes it read high.
    fn surveyed_zero(&mut self) {
        let head = self.station.head.as_ref().and_then(|head| head.zero_above_crest.as_ref());
        let place = self.station.inputs.iter().position(|input| input.key == "head");
        let (Some(zero), Some(input)) = (head, place) else { return };
        self.sources.push(Source {
            name: SURVEYED_ZERO.to_owned(),
            effects: vec![Effect { input, action: PLAIN_SHIFT }],
            distribution: Distribution::Fixed { mean: -zero.value },
            degrees_of_freedom: f64::INFINITY,
        });
        self.rows.push(SourceRow {
            acts_on: vec!["head".to_owned()],
            scales: false,
            unit: "m".to_owned(),
            size: format!("zero {} above the crest, taken out", zero.text),
            fixed_until: "survey".to_owned(),
            evidence: Evidence::default(),
            published: None,
            replaces: None,
            is_correction: true,
        });
    }

    /// Inputs that are given by their observations bring the uncertainty of the mean (JCGM 100 4.2.3).
    fn observed(&mut self) {
        for (input, stated) in self.station.inputs.iter().enumerate() {
            let count = stated.observations.len();
            if count < 2 {
                continue;
            }
            debug_assert!(stated.value == Some(mean(&stated.observations)));
            let scale = standard_deviation(&stated.observations) / (count as f64).sqrt();
            let degrees_of_freedom = count as f64 - 1.0;
            self.sources.push(Source {
                name: observations_name(stated),
                effects: vec![Effect { input, action: PLAIN_SHIFT }],
                distribution: Distribution::ScaledT { mean: 0.0, scale, degrees_of_freedom },
                degrees_of_freedom,
            });
            self.rows.push(SourceRow {
                acts_on: vec![stated.key.clone()],
                scales: false,
                unit: stated.dimension.to_string(),
                size: format!("mean of {count} observations"),
                fixed_until: "survey".to_owned(),
                evidence: stated.evidence.clone(),
                published: None,
                replaces: None,
                is_correction: false,
            });
        }
    }
}
