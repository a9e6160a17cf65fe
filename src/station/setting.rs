//! A station at one head: the problem to propagate, and what each of its sources is in the file.

use thiserror::Error;

use super::file::{Station, observations_name};
use super::size::Size;
use super::source::ErrorSource;
use super::structure::{Evidence, Kind, StationInput, mean, standard_deviation};
use super::tailwater::Tailwater;
use crate::diagnostic::{Code, Warning};
use crate::model::structures::{
    AutomaticSource, Form, Installation, SecondHead, TAILWATER_HEAD, TailwaterCurve, Values,
};
use crate::model::{Citation, Confidence, Fault, Model, Outcome};
use crate::propagation::{Action, Correlation, Distribution, Effect, Problem, Source, corrected};

/// A station at one head.
#[derive(Clone, Debug)]
pub struct Setting {
    /// What is propagated; its output is the result.
    pub problem: Problem,
    /// For each source of the problem, in the same order.
    pub rows: Vec<SourceRow>,
    /// The form of the structure's equation; `None` for an equation of the user's own.
    pub form: Option<Form>,
    /// What is doubtful about the question at this head.
    pub warnings: Vec<Warning>,
}

/// The moment that is asked about.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Moment {
    /// Indicated head, m; `None` for an equation that reads none.
    pub head: Option<f64>,
    /// Indicated head of the tailwater, m, in place of what the file says.
    pub tailwater: Option<f64>,
    /// The month, 1 to 12, whose sources count; `None`: all.
    pub month: Option<u32>,
}

/// A station at one head, nothing built.
#[derive(Clone, Debug, PartialEq)]
pub struct Sketch {
    /// Which regime holds: the structure's, or that of each section of a compound weir.
    pub regimes: Vec<usize>,
    /// The corrected inputs.
    pub corrected: Vec<f64>,
}

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
    /// It is the published uncertainty of a coefficient, which holds within limits.
    pub is_coefficient: bool,
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
    /// The tailwater is a column of the record.
    #[error("the tailwater is a column of the record: give --tailwater for one head")]
    NoTailwater,
    /// A tailwater is given to a station that has none.
    #[error("this station states no [tailwater]")]
    TailwaterNotRead,
    /// The equation cannot be built, which reading rules out.
    #[error("the equation cannot be built: {}", .0.first().map(ToString::to_string).unwrap_or_default())]
    Equation(Vec<Fault>),
    /// No water passes the crest.
    #[error(
        "no water passes the crest at an indicated head of {0} m, or too little for the equation; known \
         biases are taken out"
    )]
    Dry(f64),
    /// The equation has no solution here.
    #[error("the equation has no value here: {0}")]
    NoSolution(String),
    /// The published rule for the size of an automatic source has no value here.
    #[error(
        "the published rule for the size of `{0}` has no value here: state an error source of your own with \
         replaces = \"{0}\""
    )]
    NoPublishedSize(String),
    /// The discharge jumps over the flow that is asked about.
    #[error(
        "no head gives a flow of {flow} m3/s: at {head} m it jumps from {below} m3/s to {above} m3/s, as \
         the published equation changes there"
    )]
    FlowJumps {
        /// The flow, m3/s.
        flow: f64,
        /// Where it jumps, m.
        head: f64,
        /// The flow just below, m3/s.
        below: f64,
        /// The flow just above, m3/s.
        above: f64,
    },
    /// The tailwater stands as high as the water upstream.
    #[error(
        "the tailwater head ({tailwater} m) is not below the head ({head} m): the flow may run backwards"
    )]
    TailwaterAbove {
        /// Corrected head of the tailwater, m.
        tailwater: f64,
        /// Corrected head, m.
        head: f64,
    },
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
    /// The station at a moment.
    ///
    /// # Errors
    ///
    /// [`Refusal`] where there is no head to work at, or one too many.
    pub fn at(&self, moment: Moment) -> Result<Setting, Refusal> {
        self.check_moment(moment)?;
        let mut inputs = self.indicated_inputs(moment);
        let (mut model, form) = self.model(moment, &mut inputs)?;
        let Builder { mut sources, mut rows, mut warnings, .. } = self.known(moment, &inputs);
        let shared = match &form {
            Some(form) => {
                let corrected = corrected(&inputs, &sources);
                self.published(&mut model, form, &corrected, &mut sources, &mut rows)?
            }
            None => Vec::new(),
        };
        let correlations = self.correlate(&sources, &shared, &mut warnings);
        let problem = Problem {
            outputs: vec![model.result()],
            model,
            indicated: inputs,
            sources,
            correlations,
        };
        Ok(Setting { problem, rows, form, warnings })
    }

    /// Which regimes the structure's equation takes at a moment (of each section, for a compound weir), and
    /// the corrected inputs: for a look at many heads, nothing is built. `None` for an equation of the
    /// user's own. A tailwater that follows the discharge is left to the rating.
    ///
    /// # Errors
    ///
    /// As [`Station::at`].
    pub fn sketch(&self, moment: Moment) -> Result<Option<Sketch>, Refusal> {
        self.check_moment(moment)?;
        let Kind::Catalogue(installation) = &self.kind else { return Ok(None) };
        let inputs = self.indicated_inputs(moment);
        let known = self.known(moment, &inputs);
        let regimes = installation.regimes(&self.values(moment));
        Ok(Some(Sketch { regimes, corrected: corrected(&inputs, &known.sources) }))
    }

    /// The form of the structure's equation at a moment; `None` for an equation of the user's own.
    pub fn form(&self, moment: Moment) -> Option<Form> {
        let Kind::Catalogue(installation) = &self.kind else { return None };
        let mut installation = installation.as_ref().clone();
        if moment.tailwater.is_some() {
            set_curve(&mut installation, None);
        }
        Some(installation.form(&self.values(moment)))
    }

    fn check_moment(&self, moment: Moment) -> Result<(), Refusal> {
        match (&self.head, moment.head) {
            (Some(_), None) => return Err(Refusal::NoHead),
            (None, Some(_)) => return Err(Refusal::HeadNotRead),
            _ => {}
        }
        match (&self.tailwater, moment.tailwater) {
            (Some(Tailwater::Column { .. }), None) => Err(Refusal::NoTailwater),
            (None, Some(_)) => Err(Refusal::TailwaterNotRead),
            _ => Ok(()),
        }
    }

    /// The indicated value of an input; `None` if it is left out, or follows the discharge.
    fn indicated(moment: Moment, input: &StationInput) -> Option<f64> {
        match input.key.as_str() {
            "head" => moment.head,
            key if key == TAILWATER_HEAD.key => moment.tailwater.or(input.value),
            _ => input.value,
        }
    }

    /// All of them; what is left out does not enter the equation, and no value of it may spread as NaN.
    fn indicated_inputs(&self, moment: Moment) -> Vec<f64> {
        self.inputs.iter().map(|input| Self::indicated(moment, input).unwrap_or(0.0)).collect()
    }

    fn values(&self, moment: Moment) -> Values {
        Values::new(
            self.inputs.iter().map(|input| (input.key.clone(), Self::indicated(moment, input))),
        )
    }

    /// The sources that the file states, known biases among them.
    fn known<'s>(&'s self, moment: Moment, inputs: &'s [f64]) -> Builder<'s> {
        let mut builder = Builder {
            station: self,
            indicated: inputs,
            sources: Vec::new(),
            rows: Vec::new(),
            warnings: Vec::new(),
        };
        builder.stated(moment.month);
        builder.surveyed_zero();
        builder.observed();
        builder
    }

    /// The model at indicated values. Where the tailwater follows the discharge, its level is put among
    /// them.
    fn model(&self, moment: Moment, inputs: &mut [f64]) -> Result<(Model, Option<Form>), Refusal> {
        let installation = match &self.kind {
            Kind::Own(equation) => {
                let model = Model::build(&equation.blueprint).map_err(Refusal::Equation)?;
                return Ok((model, None));
            }
            Kind::Catalogue(installation) => installation,
        };
        let values = self.values(moment);
        let build = |installation: &Installation| {
            let form = installation.form(&values);
            let model = Model::build(&form.blueprint).map_err(Refusal::Equation)?;
            Ok((model, Some(form)))
        };
        let place = self.inputs.iter().position(|input| input.key == TAILWATER_HEAD.key);
        let curve = installation.second_head.as_ref().and_then(|second| second.curve.as_ref());
        let (Some(curve), Some(place)) = (curve, place) else { return build(installation) };
        let mut installed = installation.as_ref().clone();
        inputs[place] = if let Some(level) = moment.tailwater {
            // A level that is asked about stands, whatever the curve says.
            set_curve(&mut installed, None);
            level
        } else {
            let (mut model, _) = build(&installed)?;
            let level = model.expression("h_2").map_err(Refusal::Equation)?.0;
            let level = model.evaluate(&[level], inputs).0[0];
            // Where there is no flow to follow, the equation itself says so below.
            let level = if level.is_nan() { 0.0 } else { level };
            set_curve(&mut installed, Some(TailwaterCurve { level, ..curve.clone() }));
            level
        };
        build(&installed)
    }

    /// The sources that the structure brings with it, at the corrected inputs.
    ///
    /// Gives the pairs of them that share their cause.
    fn published(
        &self,
        model: &mut Model,
        form: &Form,
        corrected: &[f64],
        sources: &mut Vec<Source>,
        rows: &mut Vec<SourceRow>,
    ) -> Result<Vec<Correlation>, Refusal> {
        let replaced = |name: &String| {
            self.sources.iter().any(|source| source.replaces.as_ref() == Some(name))
        };
        let mut causes: Vec<(usize, &str)> = Vec::new();
        for automatic in &form.automatic {
            let AutomaticSource { name, acts_on, rule, scales, words, .. } = automatic;
            let Some(input) = model.input(acts_on).filter(|_| !replaced(name)) else { continue };
            let Ok((rule, _)) = model.expression(rule) else { continue };
            let (values, outcome) = model.evaluate(&[rule], corrected);
            // Where the equation itself has no value, that is said in its own words.
            let (_, of_result) = model.evaluate(&[model.result()], corrected);
            if outcome == Outcome::Undefined && of_result != Outcome::Undefined {
                return Err(Refusal::NoPublishedSize(name.clone()));
            }
            // Published at 95 %: half of it is the standard uncertainty, and per cent are hundredths.
            let standard_uncertainty = values[0] * if *scales { 0.5 / 100.0 } else { 1.0 };
            let action = if *scales { Action::Scale } else { PLAIN_SHIFT };
            let size = if *scales {
                format!("{} % at 95 %", round_digits(values[0]))
            } else {
                words.clone()
            };
            causes.push((sources.len(), &automatic.cause));
            sources.push(Source {
                name: name.clone(),
                effects: vec![Effect { input, action }],
                distribution: Distribution::Normal { mean: 0.0, standard_uncertainty },
                degrees_of_freedom: f64::INFINITY,
            });
            rows.push(SourceRow {
                acts_on: vec![acts_on.clone()],
                scales: *scales,
                unit: if *scales { "1".to_owned() } else { "m".to_owned() },
                size,
                fixed_until: "rebuilding".to_owned(),
                evidence: Evidence::default(),
                published: Some(automatic.published),
                replaces: None,
                is_correction: false,
                is_coefficient: automatic.is_coefficient,
            });
        }
        let pairs = causes.iter().enumerate().flat_map(|(index, (second, cause))| {
            let same = causes[..index].iter().filter(move |(_, other)| other == cause);
            same.map(|(first, _)| Correlation { sources: [*first, *second], coefficient: 1.0 })
        });
        Ok(pairs.collect())
    }

    /// Correlations that the file states, and those of sources that share their cause.
    fn correlate(
        &self,
        sources: &[Source],
        shared: &[Correlation],
        warnings: &mut Vec<Warning>,
    ) -> Vec<Correlation> {
        let place = |name: &String| sources.iter().position(|source| source.name == *name);
        let mut correlations: Vec<Correlation> = self
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
        let stated = correlations.len();
        for each in shared {
            let named =
                |index: usize| correlations[..stated].iter().any(|c| c.sources.contains(&index));
            // What the file says of either stands.
            if !each.sources.into_iter().any(named) {
                correlations.push(*each);
            }
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
                    Kind::Catalogue(_) if self.tailwater.is_some() => {
                        "critical flow cannot pass at this head, or the tailwater is too near to it for \
                         the equation of drowned flow"
                    }
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

/// Puts another tailwater curve in the place of an installation's.
fn set_curve(installation: &mut Installation, curve: Option<TailwaterCurve>) {
    if let Some(second) = installation.second_head.take() {
        installation.second_head = Some(SecondHead { curve, ..second });
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
            is_coefficient: false,
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
            is_coefficient: false,
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
                is_coefficient: false,
            });
        }
    }
}
