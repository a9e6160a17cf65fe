//! The budget: what each error source contributes to the uncertainty of one discharge, by both methods.

use crate::diagnostic::{Code, Warning};
use crate::model::expression::Table;
use crate::model::structures::{Form, TAILWATER_HEAD};
use crate::propagation::monte_carlo::{Amount, MonteCarlo, monte_carlo};
use crate::propagation::{Agreement, Coverage, Linear, Share, shares};
use crate::station::{
    Evidence, Kind, Moment, Refusal, Setting, Station, Tailwater, unstated_warning,
};
use crate::units::{Unit, significant};

use super::answer::{Answer, answer};
use super::at::{At, find_moment};
use super::hydraulics::{FlowState, Hydraulics, hydraulics};
use super::limits::{LimitState, limit_states, limit_warnings, station_limits};
use super::range::{failing_heads, note_failing_heads};
use super::warnings::{
    branch_warnings, dominance_warning, freedom_warning, memory_warning, table_warnings,
    trial_warnings,
};

/// What is asked.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Question {
    /// Where.
    pub at: At,
    /// What the expanded uncertainty is to cover.
    pub coverage: Coverage,
    /// How many trials; `None` leaves the Monte Carlo method out.
    pub trials: Option<Amount>,
    /// Seed of the random numbers.
    pub seed: u64,
    /// Indicated head of the tailwater, m, in place of what the file says.
    pub tailwater: Option<f64>,
    /// The month of the year, 1 to 12, for sources that are there in some months only.
    pub month: Option<u32>,
}

/// The answer.
#[derive(Clone, Debug)]
pub struct Budget {
    /// The station's name.
    pub station: String,
    /// The kind of its structure.
    pub kind: String,
    /// The structure in words, and its standard.
    pub title: String,
    /// The standard behind the equation; empty for a user's own.
    pub standard: String,
    /// The form of the equation; empty for a user's own.
    pub regime: String,
    /// SHA-256 of the station file.
    pub digest: String,
    /// Indicated head, m.
    pub head: Option<f64>,
    /// Corrected head, m.
    pub corrected_head: Option<f64>,
    /// Indicated head of the tailwater, m; `None` where the file states none.
    pub tailwater: Option<f64>,
    /// The month asked about.
    pub month: Option<u32>,
    /// The equations with their values.
    pub equations: Vec<EquationRow>,
    /// Published numbers in them: what, by whom, how well known.
    pub numbers: Vec<[String; 3]>,
    /// The inputs.
    pub inputs: Vec<InputRow>,
    /// The result.
    pub result: ResultPart,
    /// What was to be covered.
    pub coverage: Coverage,
    /// The linear method.
    pub linear: Linear,
    /// Its coverage factor.
    pub coverage_factor: f64,
    /// Its expanded uncertainty.
    pub expanded_uncertainty: f64,
    /// The Monte Carlo method; `None` where it was left out.
    pub monte_carlo: Option<MonteCarloPart>,
    /// The sources, ranked.
    pub rows: Vec<BudgetRow>,
    /// Known biases that were taken out.
    pub corrections: Vec<Correction>,
    /// The limits of use.
    pub limits: Vec<LimitState>,
    /// Whether the flow is modular; `None` for an equation of the user's own.
    pub hydraulics: Option<Hydraulics>,
    /// Caveats.
    pub warnings: Vec<Warning>,
}

/// The quantity that is asked for.
#[derive(Clone, Debug, PartialEq)]
pub struct ResultPart {
    /// Its name: `discharge`, or what an own equation calls it.
    pub name: String,
    /// Its coherent SI unit.
    pub unit: Unit,
    /// The unit that an own equation states for it.
    pub stated_unit: Option<Unit>,
    /// Corrected, by the linear method.
    pub value: f64,
    /// As indicated.
    pub indicated: f64,
    /// Indicated minus corrected.
    pub known_bias: f64,
    /// Expanded uncertainty of the linear method in per cent of the value; `None` at 0.
    pub relative_expanded_percent: Option<f64>,
    /// Known bias in per cent of the value; `None` at 0.
    pub relative_bias_percent: Option<f64>,
}

/// What the Monte Carlo method gives.
#[derive(Clone, Debug, PartialEq)]
pub struct MonteCarloPart {
    /// Trials, tallies, statistics.
    pub result: MonteCarlo,
    /// The comparison with the linear method.
    pub agreement: Agreement,
    /// Base trials of the shares.
    pub base_trials: u64,
}

/// An equation, for retracing.
#[derive(Clone, Debug, PartialEq)]
pub struct EquationRow {
    /// Left-hand side.
    pub name: String,
    /// Right-hand side.
    pub text: String,
    /// Its value at the corrected inputs, in SI units; `None` where it has none.
    pub value: Option<f64>,
    /// The SI unit.
    pub unit: String,
}

/// An input, for retracing.
#[derive(Clone, Debug, PartialEq)]
pub struct InputRow {
    /// Its key.
    pub key: String,
    /// Its symbol.
    pub symbol: String,
    /// As the file states it; empty for a default.
    pub stated: String,
    /// As indicated, in SI units; `None` for one that is left out.
    pub indicated: Option<f64>,
    /// With known biases taken out.
    pub corrected: Option<f64>,
    /// Its SI unit.
    pub unit: String,
    /// What stands behind it.
    pub evidence: Evidence,
}

/// One source in a budget.
#[derive(Clone, Debug, PartialEq)]
pub struct BudgetRow {
    /// Its rank, from 1.
    pub rank: usize,
    /// Its name.
    pub name: String,
    /// The keys of the inputs it acts on.
    pub acts_on: Vec<String>,
    /// Its size as stated.
    pub size: String,
    /// When a new draw is made.
    pub fixed_until: String,
    /// Standard uncertainty of its error.
    pub standard_uncertainty: f64,
    /// The SI unit of its error; `1` where it scales.
    pub unit: String,
    /// Degrees of freedom; infinite if taken as exactly known.
    pub degrees_of_freedom: f64,
    /// Derivative of the result by its error.
    pub sensitivity: f64,
    /// Absolute sensitivity times standard uncertainty, in the SI unit of the result.
    pub contribution: f64,
    /// Contribution in per cent of the result; `None` at 0.
    pub contribution_percent: Option<f64>,
    /// Standard uncertainty of the head that it makes, m; `None` if it does not act on the head.
    pub head_uncertainty: Option<f64>,
    /// Share by the linear method.
    pub share_linear: f64,
    /// Shares by the Monte Carlo method, of the source or of the correlated set it belongs to.
    pub share: Option<Share>,
    /// Other sources that it is correlated with.
    pub correlated_with: Vec<String>,
    /// What stands behind it.
    pub evidence: Evidence,
    /// Who published it, and how well that is known; for automatic sources.
    pub published: Option<(String, String)>,
    /// It is published for use within limits that are not kept.
    pub outside_limits: bool,
    /// The automatic source whose place it takes.
    pub replaces: Option<String>,
}

/// A known bias that was taken out.
#[derive(Clone, Debug, PartialEq)]
pub struct Correction {
    /// Where it comes from.
    pub name: String,
    /// The keys of the inputs that it is a bias of.
    pub acts_on: Vec<String>,
    /// Indicated minus true, in SI units of the input; a fraction where it scales.
    pub bias: f64,
    /// The SI unit of the bias.
    pub unit: String,
    /// What leaving it in would do to the result, in per cent of it; to first order.
    pub effect_percent: Option<f64>,
}

/// Draws up the budget of a station.
///
/// `progress` is told of Monte Carlo trials as they are done, from any thread.
///
/// # Errors
///
/// [`Refusal`] where the station has no head to work at, or no flow.
pub fn budget(
    station: &Station,
    question: &Question,
    progress: &(dyn Fn(u64) + Sync),
) -> Result<Budget, Refusal> {
    let Question { tailwater, month, .. } = *question;
    let moment = find_moment(station, question.at, Moment { head: None, tailwater, month })?;
    let head = moment.head;
    let Answer { mut setting, corrected, linear } = answer(station, moment)?;
    let (coverage_factor, expanded_uncertainty) = linear.expanded(question.coverage);
    let mut warnings = station.warnings.clone();
    warnings.append(&mut setting.warnings);
    let mut limits = match &setting.form {
        Some(form) => limit_states(&mut setting.problem.model, form, &corrected),
        None => Vec::new(),
    };
    note_failing_heads(&mut limits, &failing_heads(station, moment).unwrap_or_default());
    limits.extend(station_limits(station, moment));
    warnings.extend(limit_warnings(&limits));
    warnings.extend(range_warning(station, head));
    let hydraulics = hydraulics(&mut setting, &limits, &corrected);
    warnings.extend(drowned_warnings(&setting, hydraulics.as_ref()));
    warnings.extend(table_warnings(&mut setting, &corrected));
    warnings.extend(branch_warnings(&setting));
    warnings.extend(freedom_warning(&linear));
    warnings.extend(dominance_warning(&setting, &linear, question.coverage));
    let monte_carlo = run_monte_carlo(
        &mut setting,
        question,
        &linear,
        expanded_uncertainty,
        progress,
        &mut warnings,
    );
    warnings.extend(memory_warning(&setting, &limits));
    let (monte_carlo, shares) = match monte_carlo {
        Some((part, shares)) => (Some(part), Some(shares)),
        None => (None, None),
    };
    let kind = kind_words(station, setting.form.as_ref());
    let rows = rows(&setting, &linear, shares.as_deref(), &limits, &corrected);
    Ok(Budget {
        station: station.name.clone(),
        kind: kind.0,
        title: kind.1,
        standard: kind.2,
        regime: setting.form.as_ref().map_or_else(String::new, |form| form.regime.clone()),
        digest: station.digest.clone(),
        head,
        corrected_head: head.and(setting.problem.model.input("head")).map(|input| corrected[input]),
        tailwater: setting
            .problem
            .model
            .input(TAILWATER_HEAD.key)
            .map(|input| setting.problem.indicated[input]),
        month: question.month,
        equations: equations(station, &mut setting, &corrected),
        numbers: numbers(&setting),
        inputs: input_rows(station, &setting, &corrected, tailwater.is_some()),
        result: result_part(station, &setting, &linear, expanded_uncertainty),
        coverage: question.coverage,
        coverage_factor,
        expanded_uncertainty,
        monte_carlo,
        rows,
        corrections: corrections(&setting, &linear),
        hydraulics,
        limits,
        warnings,
        linear,
    })
}

/// The kind, what it is in words, its standard.
fn kind_words(station: &Station, form: Option<&Form>) -> (String, String, String) {
    match &station.kind {
        Kind::Catalogue(installation) => {
            let structure = installation.structure;
            // The only form that there is goes without saying.
            let says = structure.regimes.len() > 1 || !installation.sections.is_empty();
            let title = match form.filter(|_| says) {
                Some(form) => format!("{}, {}", structure.title, form.regime),
                None => structure.title.to_owned(),
            };
            (structure.kind.to_owned(), title, structure.standard.document.to_owned())
        }
        Kind::Own(_) => {
            ("equation".to_owned(), "An equation of the station's own".to_owned(), String::new())
        }
    }
}

/// The head is one that the station is not asked about.
fn range_warning(station: &Station, head: Option<f64>) -> Option<Warning> {
    let [low, high] = station.head.as_ref()?.range.as_ref()?;
    let head = head.filter(|head| !(low.value..=high.value).contains(head))?;
    let text = format!(
        "the head of {} m is outside the station's range, {} to {}",
        significant(head, 4),
        low.text,
        high.text
    );
    Some(Warning::new(Code::OutsideRange, text))
}

/// Factors of drowned flow that no source acts on, where the flow is drowned.
fn drowned_warnings(setting: &Setting, hydraulics: Option<&Hydraulics>) -> Vec<Warning> {
    let Some(form) = &setting.form else { return Vec::new() };
    let drowned = hydraulics.is_some_and(|found| found.state == FlowState::Drowned);
    let acted_on =
        |key: &String| setting.rows.iter().any(|row| row.acts_on.iter().any(|acts| acts == key));
    form.unstated
        .iter()
        .filter(|each| drowned && each.when_drowned && !each.inputs.iter().any(acted_on))
        .map(unstated_warning)
        .collect()
}

/// The equations with their values at the corrected inputs, the result first, then what it is made of.
fn equations(station: &Station, setting: &mut Setting, corrected: &[f64]) -> Vec<EquationRow> {
    let model = &mut setting.problem.model;
    let unknowns = model.unknowns().to_vec().into_iter().map(|unknown| {
        (
            unknown.name.clone(),
            format!("root of 0 = {}", model.text(unknown.residual)),
            unknown.dimension,
        )
    });
    let definitions = model.definitions().iter().rev();
    let definitions = definitions
        .map(|each| (each.name.clone(), model.text_of_definition(each.id), each.dimension));
    let mut lines: Vec<_> = definitions.chain(unknowns).collect();
    lines.sort_by_key(|(name, ..)| name != model.result_name());
    let ids: Vec<_> = lines
        .iter()
        .map(|(name, ..)| model.expression(name).map_or_else(|_| model.result(), |(id, _)| id))
        .collect();
    let (values, _) = model.evaluate(&ids, corrected);
    let rows = lines.into_iter().zip(values).map(|((name, text, dimension), value)| EquationRow {
        name,
        text,
        value: Some(value).filter(|value| value.is_finite()),
        unit: dimension.to_string(),
    });
    let curve = match &station.tailwater {
        Some(Tailwater::Curve(table)) => Some(EquationRow {
            name: table.name().to_owned(),
            text: curve_text(table),
            value: None,
            unit: "m".to_owned(),
        }),
        _ => None,
    };
    rows.chain(curve).collect()
}

fn curve_text(table: &Table) -> String {
    let points = table
        .points()
        .map(|(flow, level)| format!("{} m3/s: {} m", significant(flow, 6), significant(level, 6)));
    format!("linear between {}", points.collect::<Vec<_>>().join("; "))
}

/// The published numbers in the equation.
fn numbers(setting: &Setting) -> Vec<[String; 3]> {
    let numbers = setting.form.iter().flat_map(|form| &form.numbers);
    numbers
        .map(|each| {
            [each.what.clone(), each.source.document.to_owned(), each.confidence.words().to_owned()]
        })
        .collect()
}

fn input_rows(
    station: &Station,
    setting: &Setting,
    corrected: &[f64],
    tailwater_is_asked: bool,
) -> Vec<InputRow> {
    let indicated = &setting.problem.indicated;
    station
        .inputs
        .iter()
        .enumerate()
        .map(|(place, input)| {
            let of_the_moment = ["head", TAILWATER_HEAD.key].contains(&input.key.as_str());
            let left_out = input.value.is_none() && !of_the_moment;
            let stated = match &station.tailwater {
                _ if input.key != TAILWATER_HEAD.key => &input.text,
                // A level that was asked about takes the place of what the file says.
                _ if tailwater_is_asked => "",
                Some(Tailwater::Curve(_)) => "by its table",
                _ => &input.text,
            };
            InputRow {
                key: input.key.clone(),
                symbol: input.symbol.clone(),
                stated: stated.to_owned(),
                indicated: (!left_out).then_some(indicated[place]),
                corrected: (!left_out).then_some(corrected[place]),
                unit: input.dimension.to_string(),
                evidence: input.evidence.clone(),
            }
        })
        .collect()
}

fn per_cent(part: f64, whole: f64) -> Option<f64> {
    (whole != 0.0).then(|| 100.0 * part / whole.abs())
}

fn result_part(
    station: &Station,
    setting: &Setting,
    linear: &Linear,
    expanded_uncertainty: f64,
) -> ResultPart {
    let model = &setting.problem.model;
    let (name, stated_unit) = match &station.kind {
        Kind::Catalogue(_) => ("discharge".to_owned(), None),
        Kind::Own(equation) => (model.result_name().to_owned(), Some(equation.unit.clone())),
    };
    let known_bias = linear.indicated - linear.value;
    ResultPart {
        name,
        unit: Unit::si(model.result_dimension()),
        stated_unit,
        value: linear.value,
        indicated: linear.indicated,
        known_bias,
        relative_expanded_percent: per_cent(expanded_uncertainty, linear.value),
        relative_bias_percent: per_cent(known_bias, linear.value),
    }
}

/// Where more trials than this have no value, an interval from the others says nothing.
const MOST_UNDEFINED: f64 = 0.01;

/// Runs the Monte Carlo method with its shares, and notes what was special about the trials.
fn run_monte_carlo(
    setting: &mut Setting,
    question: &Question,
    linear: &Linear,
    expanded_uncertainty: f64,
    progress: &(dyn Fn(u64) + Sync),
    warnings: &mut Vec<Warning>,
) -> Option<(MonteCarloPart, Vec<Share>)> {
    let amount = question.trials?;
    let probability = question.coverage.probability();
    let problem = &mut setting.problem;
    let Some(result) = monte_carlo(problem, amount, question.seed, probability, progress) else {
        warnings.push(Warning::new(
            Code::TrialsUndefined,
            "the Monte Carlo method is left out: too few trials have a value",
        ));
        return None;
    };
    let left_out = result.tally.undefined as f64 / result.trials as f64;
    if left_out > MOST_UNDEFINED {
        warnings.push(Warning::new(
            Code::TrialsUndefined,
            format!(
                "the Monte Carlo method is left out: in {} % of the trials the equation has no value, \
                 so that neither method can be relied on here",
                significant(100.0 * left_out, 3)
            ),
        ));
        return None;
    }
    let shares = shares(problem, question.seed);
    let statistics = result.outputs[0];
    let agreement = Agreement::new(
        linear.value,
        expanded_uncertainty,
        statistics.intervals.symmetric,
        statistics.standard_uncertainty,
    );
    warnings.extend(trial_warnings(&result));
    for source in problem.sources.iter().filter(|source| !source.distribution.has_moments()) {
        warnings.push(Warning::new(
            Code::MomentsDoNotExist,
            format!(
                "`{}`: a t distribution with 1 or 2 degrees of freedom has no standard deviation; \
                 the Monte Carlo standard uncertainty has no meaning, the interval has",
                source.name
            ),
        ));
    }
    if !agreement.linear_is_adequate() {
        warnings.push(Warning::new(
            Code::LinearNotAdequate,
            "the linear method is not adequate here (JCGM 101 clause 8): take the Monte Carlo \
             interval, and the shares as a guide only",
        ));
    }
    let part = MonteCarloPart { result, agreement, base_trials: shares.base_trials };
    Some((part, shares.sources))
}

fn rows(
    setting: &Setting,
    linear: &Linear,
    shares: Option<&[Share]>,
    limits: &[LimitState],
    corrected: &[f64],
) -> Vec<BudgetRow> {
    let problem = &setting.problem;
    let outside = limits.iter().any(|state| !state.kept && state.asked.bears_on_coefficient());
    let groups = problem.groups();
    linear
        .ranking()
        .into_iter()
        .filter(|place| !setting.rows[*place].is_correction)
        .zip(1..)
        .map(|(place, rank)| {
            let (source, row) = (&problem.sources[place], &setting.rows[place]);
            let contribution = linear.contributions[place];
            let group = groups.iter().find(|group| group.contains(&place));
            let others = group
                .into_iter()
                .flatten()
                .filter(|other| **other != place && problem.correlation(**other, place) != 0.0);
            BudgetRow {
                rank,
                name: source.name.clone(),
                acts_on: row.acts_on.clone(),
                size: row.size.clone(),
                fixed_until: row.fixed_until.clone(),
                standard_uncertainty: contribution.standard_uncertainty,
                unit: row.unit.clone(),
                degrees_of_freedom: source.degrees_of_freedom,
                sensitivity: contribution.sensitivity,
                contribution: contribution.contribution,
                contribution_percent: per_cent(contribution.contribution, linear.value),
                head_uncertainty: head_uncertainty(setting, place, corrected),
                share_linear: contribution.share,
                share: shares.map(|shares| shares[place]),
                correlated_with: others.map(|o| problem.sources[*o].name.clone()).collect(),
                evidence: row.evidence.clone(),
                published: row
                    .published
                    .map(|(by, known)| (by.document.to_owned(), known.words().to_owned())),
                outside_limits: outside && row.is_coefficient,
                replaces: row.replaces.clone(),
            }
        })
        .collect()
}

/// What a source's standard uncertainty is in metres of head.
fn head_uncertainty(setting: &Setting, place: usize, corrected: &[f64]) -> Option<f64> {
    use crate::propagation::Action;

    let head = setting.problem.model.input("head")?;
    let source = &setting.problem.sources[place];
    let effect = source.effects.iter().find(|effect| effect.input == head)?;
    let u = source.distribution.standard_uncertainty();
    Some(match effect.action {
        Action::Shift { gain, .. } => (gain * u).abs(),
        Action::Scale => (corrected[head] * u).abs(),
    })
}

/// Known biases, each with what leaving it in would do.
fn corrections(setting: &Setting, linear: &Linear) -> Vec<Correction> {
    setting
        .problem
        .sources
        .iter()
        .zip(&setting.rows)
        .zip(&linear.contributions)
        .filter(|((source, _), _)| source.distribution.mean() != 0.0)
        .map(|((source, row), contribution)| {
            let bias = source.distribution.mean();
            Correction {
                name: source.name.clone(),
                acts_on: row.acts_on.clone(),
                bias,
                unit: row.unit.clone(),
                // The sensitivity is that of the corrected result to an error; left in, the error stays.
                effect_percent: per_cent(-contribution.sensitivity * bias, linear.value),
            }
        })
        .collect()
}
