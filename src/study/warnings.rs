//! Caveats about a budget, in words: of its trials, its degrees of freedom, its tables, its sources.

use super::limits::LimitState;
use crate::diagnostic::{Code, Warning};
use crate::propagation::monte_carlo::MonteCarlo;
use crate::propagation::{Coverage, DegreesOfFreedom, Dominant, Linear, dominant, linear};
use crate::station::Setting;
use crate::units::significant;

pub(super) fn trial_warnings(result: &MonteCarlo) -> Vec<Warning> {
    let share = |count: u64| {
        let percent = 100.0 * count as f64 / result.trials as f64;
        format!("in {count} of {} trials ({} %)", result.trials, significant(percent, 3))
    };
    let mut warnings = Vec::new();
    if result.tally.dry > 0 {
        let text =
            format!("{} no water passes the crest; the result is 0 there", share(result.tally.dry));
        warnings.push(Warning::new(Code::TrialsWithoutFlow, text));
    }
    if result.tally.outside_table > 0 {
        let text = format!(
            "{} a published table or curve is left; its end value is held",
            share(result.tally.outside_table)
        );
        warnings.push(Warning::new(Code::TrialsOutsideTable, text));
    }
    if result.tally.undefined > 0 {
        let text = format!(
            "{} the equation has no value; they are left out, and the interval is too narrow",
            share(result.tally.undefined)
        );
        warnings.push(Warning::new(Code::TrialsUndefined, text));
    }
    if result.tally.across > 0 {
        let text = format!(
            "{} another branch of the equation holds than at the values asked about",
            share(result.tally.across)
        );
        warnings.push(Warning::new(Code::TrialsAcrossBranch, text));
    }
    if !result.settled {
        let text = format!(
            "after {} trials the figures have not settled to two digits; take the interval with care",
            result.trials
        );
        warnings.push(Warning::new(Code::NotSettled, text));
    }
    warnings
}

/// The normal or t factor reaches beyond the limits of what outweighs the rest.
pub(super) fn dominance_warning(
    setting: &Setting,
    linear: &Linear,
    coverage: Coverage,
) -> Option<Warning> {
    let probability = coverage.probability();
    let Dominant { sources, coverage_factor } = dominant(&setting.problem, linear, probability)?;
    let names: Vec<String> = sources
        .iter()
        .map(|source| format!("`{}`", setting.problem.sources[*source].name))
        .collect();
    let are = if names.len() > 1 {
        "are rectangular and outweigh"
    } else {
        "is rectangular and outweighs"
    };
    let words = format!(
        "{} {are} all other sources together: at {} % the coverage factor that belongs to it is {}, and that of \
         the linear method reaches further (JCGM 100 G.6.5); take the Monte Carlo interval",
        names.join(" and "),
        significant(100.0 * probability, 4),
        significant(coverage_factor, 3)
    );
    Some(Warning::new(Code::RectangularDominates, words))
}

pub(super) fn freedom_warning(linear: &Linear) -> Option<Warning> {
    (linear.degrees_of_freedom == DegreesOfFreedom::Undefined).then(|| {
        Warning::new(
            Code::DegreesOfFreedomUndefined,
            "correlated sources have finite degrees of freedom, for which JCGM 100 has no rule \
             (JCGM 101 5.7.2): the coverage factor is that of a normal distribution",
        )
    })
}

/// Standard uncertainties within which a branch of the equation is near.
const NEAR: f64 = 3.0;

/// Branches of the equation that begin so near that its slope here does not tell how it goes on.
pub(super) fn branch_warnings(setting: &Setting) -> Vec<Warning> {
    let mut problem = setting.problem.clone();
    let branches = problem.model.branches();
    problem.outputs = branches.iter().map(|branch| problem.model.distance(*branch)).collect();
    let distances = linear(&mut problem);
    let near = branches.iter().zip(&distances).filter(|(_, distance)| {
        let u = distance.standard_uncertainty;
        u > 0.0 && distance.value.abs() <= NEAR * u
    });
    near.map(|(branch, distance)| {
        let model = &problem.model;
        let mut sides = [branch.left, branch.right];
        // A number stands on the right.
        sides.sort_by_key(|side| model.inputs_of(*side).is_empty());
        let [left, right] = sides.map(|side| model.text(side));
        let text = format!(
            "the equation branches at {left} = {right}, {} standard uncertainties from here, and the linear \
             method follows one branch only",
            significant(distance.value.abs() / distance.standard_uncertainty, 2)
        );
        Warning::new(Code::NearBranch, text)
    })
    .collect()
}

/// Whether the corrected values lie at a node of a published table, or outside one.
pub(super) fn table_warnings(setting: &mut Setting, corrected: &[f64]) -> Vec<Warning> {
    let varies: Vec<bool> =
        (0..corrected.len()).map(|input| setting.problem.varies(input)).collect();
    let model = &mut setting.problem.model;
    let mut warnings = Vec::new();
    for (table, arguments) in model.look_ups() {
        let (values, _) = model.evaluate(&arguments, corrected);
        let table = model.table(table);
        let name = table.name().to_owned();
        let places = table.axes().into_iter().zip(&values).take(table.arguments());
        // A value that is the same in every trial has no slope to jump.
        let varying = arguments.map(|id| model.inputs_of(id).iter().any(|input| varies[*input]));
        for ((axis, value), varies) in places.zip(varying) {
            if axis.excludes(*value) {
                let text = format!(
                    "the published table {name} ends before {}: its end value is held",
                    significant(*value, 4)
                );
                warnings.push(Warning::new(Code::TableEndHeld, text));
            } else if varies && axis.has_node_at(*value) {
                let text = format!(
                    "{} is a node of the published table {name}, where the slope jumps: the \
                     sensitivity is that of the segment above",
                    significant(*value, 4)
                );
                warnings.push(Warning::new(Code::TableNode, text));
            }
        }
    }
    warnings
}

/// Which published numbers behind the result are quoted from memory.
pub(super) fn memory_warning(setting: &Setting, limits: &[LimitState]) -> Option<Warning> {
    let form = setting.form.as_ref()?;
    let numbers = form.numbers.iter().filter(|each| each.confidence.is_memory());
    let mut from_memory: Vec<String> = numbers.map(|each| each.what.clone()).collect();
    for (source, row) in setting.problem.sources.iter().zip(&setting.rows) {
        if row.published.is_some_and(|(_, confidence)| confidence.is_memory()) {
            from_memory.push(format!("the uncertainty of `{}`", source.name));
        }
    }
    if limits.iter().any(|state| state.limit.confidence.is_memory()) {
        from_memory.push("limits of use".to_owned());
    }
    (!from_memory.is_empty()).then(|| {
        Warning::new(
            Code::FromMemory,
            format!(
                "quoted from memory, confirm against your copy of {}: {}",
                form.standards.join(" and "),
                from_memory.join(", ")
            ),
        )
    })
}
