//! Limits at one head: what is there against what a standard, the hydraulics and the station allow.

use crate::diagnostic::{Code, Warning};
use crate::model::expression::Id;
use crate::model::structures::{Form, InstalledLimit, LimitKind};
use crate::model::{Confidence, Model, Side};
use crate::station::{Moment, Station};
use crate::units::significant;

use super::at::without_column;

/// What a limit asks.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Asked {
    /// A standard's limit of use.
    Use,
    /// The flow is modular.
    Modular {
        /// An equation for drowned flow takes over where it is not.
        drowned: bool,
    },
    /// The flow at the control is critical.
    Critical,
    /// The head is not above the largest that the structure can take.
    Maximum,
    /// The gauge stands at the right distance.
    Gauge,
}

impl From<LimitKind> for Asked {
    fn from(kind: LimitKind) -> Self {
        match kind {
            LimitKind::Use => Self::Use,
            LimitKind::Modular { drowned } => Self::Modular { drowned },
            LimitKind::Critical => Self::Critical,
        }
    }
}

impl Asked {
    /// Where it is not kept, the published uncertainty of the coefficient does not hold.
    pub(super) fn bears_on_coefficient(self) -> bool {
        matches!(self, Self::Use | Self::Critical | Self::Modular { drowned: false })
    }
}

/// A limit against what is there.
#[derive(Clone, Debug, PartialEq)]
pub struct LimitState {
    /// What it asks.
    pub asked: Asked,
    /// The limit.
    pub limit: InstalledLimit,
    /// What is there, in SI units.
    pub value: f64,
    /// The bound, in SI units.
    pub bound: f64,
    /// How far the value is on the right side; negative on the wrong one.
    pub margin: f64,
    /// The SI unit of all three.
    pub unit: String,
    /// It is kept.
    pub kept: bool,
    /// Indicated heads of the station's range at which it is not kept, from and to, m; `None` where no
    /// range is stated, or where it does not go by the head.
    pub fails_at: Option<Vec<[f64; 2]>>,
}

/// For each limit of a form its quantity, its bound, and what is positive where it applies.
pub(super) fn limit_expressions(model: &mut Model, form: &Form) -> Vec<Id> {
    let mut read = |text: &str| {
        let read = model.expression(text);
        debug_assert!(read.is_ok(), "a test of the catalogue reads {text}");
        read.map_or_else(|_| model.result(), |(id, _)| id)
    };
    form.limits
        .iter()
        .flat_map(|limit| {
            let quantity = read(&limit.quantity);
            let applies = limit.applies.as_deref().map_or(quantity, &mut read);
            [quantity, read(&limit.bound), applies]
        })
        .collect()
}

/// The values of [`limit_expressions`], limit by limit, those that do not apply left out.
pub(super) fn limit_values<'v>(
    form: &'v Form,
    values: &'v [f64],
) -> impl Iterator<Item = (&'v InstalledLimit, Option<[f64; 2]>)> {
    form.limits.iter().zip(values.chunks(3)).map(|(limit, values)| {
        // One that cannot be told stands: it is then not kept.
        let stands = limit.applies.is_none() || !(values[2] <= 0.0);
        (limit, stands.then_some([values[0], values[1]]))
    })
}

/// The limits of a form at given values of the inputs; those that do not apply there are left out.
pub(super) fn limit_states(model: &mut Model, form: &Form, inputs: &[f64]) -> Vec<LimitState> {
    let expressions = limit_expressions(model, form);
    let (values, _) = model.evaluate(&expressions, inputs);
    limit_values(form, &values)
        .filter_map(|(limit, values)| {
            let [value, bound] = values?;
            let (_, dimension) = model.expression(&limit.quantity).ok()?;
            Some(LimitState {
                asked: limit.kind.into(),
                limit: limit.clone(),
                value,
                bound,
                margin: limit.side.margin(value, bound),
                unit: dimension.to_string(),
                kept: limit.side.allows(value, bound),
                fails_at: None,
            })
        })
        .collect()
}

/// The station's own limits at a head: the largest that it can take, and the place of its gauge.
pub(super) fn station_limits(station: &Station, moment: Moment) -> Vec<LimitState> {
    let Some(stated) = &station.head else { return Vec::new() };
    let own = |quantity: &str, side, meaning: &str| InstalledLimit {
        kind: LimitKind::Use,
        quantity: quantity.to_owned(),
        side,
        bound: String::new(),
        applies: None,
        meaning: meaning.to_owned(),
        source: crate::model::source::STATION_FILE,
        confidence: Confidence::Stated,
    };
    let state = |asked, limit: InstalledLimit, value: f64, bound: f64| LimitState {
        asked,
        margin: limit.side.margin(value, bound),
        kept: limit.side.allows(value, bound),
        limit,
        value,
        bound,
        unit: "m".to_owned(),
        fails_at: None,
    };
    let mut states = Vec::new();
    if let (Some(maximum), Some(head)) = (&stated.maximum, moment.head) {
        let limit = own("head", Side::AtMost, "largest head that the structure can take");
        states.push(state(Asked::Maximum, limit, head, maximum.value));
    }
    let largest = stated.largest().map(|largest| largest.value);
    if let (Some(distance), Some(largest)) = (&stated.gauge_distance, largest)
        && let (moment, _) = without_column(station, moment)
        && let Ok(mut setting) = station.at(Moment { head: Some(largest), ..moment })
        && let Some(form) = &setting.form
    {
        let position = form.structure.head_measured;
        let corrected = setting.problem.corrected();
        let model = &mut setting.problem.model;
        for (text, side, meaning) in [
            (position.nearest, Side::AtLeast, "distance of the gauge, at the largest head"),
            (position.farthest, Side::AtMost, "distance of the gauge, at the largest head"),
        ] {
            let Some((id, _)) = text.and_then(|text| model.expression(text).ok()) else { continue };
            let bound = model.evaluate(&[id], &corrected).0[0];
            let (source, confidence) = (position.source, position.confidence);
            let limit =
                InstalledLimit { source, confidence, ..own("gauge_distance", side, meaning) };
            states.push(state(Asked::Gauge, limit, distance.value, bound));
        }
    }
    states
}

/// A warning for each limit that is not kept.
pub(super) fn limit_warnings(states: &[LimitState]) -> Vec<Warning> {
    states.iter().filter(|state| !state.kept).map(warning).collect()
}

fn warning(state: &LimitState) -> Warning {
    let limit = &state.limit;
    let unit = if state.unit == "1" { String::new() } else { format!(" {}", state.unit) };
    let side = match limit.side {
        Side::AtMost => "above",
        Side::AtLeast => "below",
    };
    let numbers = format!(
        "{} ({}) is {}{unit}, {side} the limit of {}{unit}",
        limit.quantity,
        limit.meaning,
        significant(state.value, 4),
        significant(state.bound, 4),
    );
    let by = format!("in {} ({})", limit.source.document, limit.confidence.words());
    let (code, text) = match state.asked {
        Asked::Use => {
            (Code::OutsideLimits, format!("{numbers} {by}: a larger uncertainty is due here"))
        }
        Asked::Modular { drowned: true } => {
            (Code::DrownedFlow, format!("{numbers} {by}: the equation for drowned flow is used"))
        }
        Asked::Modular { drowned: false } => (
            Code::NotModular,
            format!(
                "{numbers} {by}: no equation for drowned flow is in force, and less water passes than is \
                 stated here; lower the tailwater, or measure otherwise"
            ),
        ),
        Asked::Critical => (
            Code::NotCritical,
            format!(
                "{numbers} by specific energy: the tailwater rules the flow, not the control; a higher sill \
                 or a narrower throat is due"
            ),
        ),
        Asked::Maximum => {
            (Code::AboveMaximum, format!("{numbers}: water goes another way that is not measured"))
        }
        Asked::Gauge => (
            Code::GaugeMisplaced,
            format!(
                "{numbers} {by}: move the gauge, or state what the misplacement costs as a source"
            ),
        ),
    };
    Warning::new(code, text)
}
