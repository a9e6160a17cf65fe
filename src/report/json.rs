//! Results as JSON: SI units, full precision. Once published, a key keeps its meaning.

use schemars::JsonSchema;
use serde::Serialize;

use crate::propagation::DegreesOfFreedom;
use crate::study::{Asked, Budget, BudgetRow, FlowState, Hydraulics, LimitState, Sheet};

/// A budget, as `--format json` prints it.
#[derive(Debug, Serialize, JsonSchema)]
pub struct BudgetJson {
    /// The station's name.
    station: String,
    /// The kind of its structure.
    structure: String,
    /// The form of its equation; null for an equation of the station's own.
    regime: Option<String>,
    /// Version of the program.
    nappe_version: String,
    /// Digest of the station file, `sha256:` and hexadecimal digits.
    station_digest: String,
    /// Where the budget was drawn up.
    at: AtJson,
    /// The quantity asked for.
    result: ResultJson,
    /// The linear method (JCGM 100).
    linear: LinearJson,
    /// The Monte Carlo method (JCGM 101); null where it was left out.
    monte_carlo: Option<MonteCarloJson>,
    /// The comparison of both methods; null without Monte Carlo.
    agreement: Option<AgreementJson>,
    /// The sources, by rank.
    sources: Vec<SourceJson>,
    /// Known biases that were taken out.
    corrections: Vec<CorrectionJson>,
    /// The inputs of the equation.
    inputs: Vec<InputJson>,
    /// The equations.
    equations: Vec<EquationJson>,
    /// Limits of use, of modular and critical flow, and of the station itself.
    limits: Vec<LimitJson>,
    /// Whether the flow is modular; null for an equation of the station's own.
    hydraulics: Option<HydraulicsJson>,
    /// Caveats.
    warnings: Vec<WarningJson>,
}

/// Where a budget was drawn up.
#[derive(Debug, Serialize, JsonSchema)]
struct AtJson {
    /// Indicated head, m; left out where the equation reads none.
    #[serde(skip_serializing_if = "Option::is_none")]
    head_m: Option<f64>,
    /// Head with known biases taken out, m.
    #[serde(skip_serializing_if = "Option::is_none")]
    corrected_head_m: Option<f64>,
    /// The month asked about.
    #[serde(skip_serializing_if = "Option::is_none")]
    month: Option<u32>,
    /// Indicated head of the tailwater, m; left out where the file states none.
    #[serde(skip_serializing_if = "Option::is_none")]
    tailwater_head_m: Option<f64>,
}

/// The quantity asked for.
#[derive(Debug, Serialize, JsonSchema)]
struct ResultJson {
    /// Its name.
    name: String,
    /// Its SI unit.
    unit: String,
    /// Corrected, by the linear method.
    value: f64,
    /// As indicated, known biases left in.
    indicated: f64,
    /// Indicated minus corrected.
    known_bias: f64,
}

/// The linear method.
#[derive(Debug, Serialize, JsonSchema)]
struct LinearJson {
    /// Combined standard uncertainty.
    standard_uncertainty: f64,
    /// Effective degrees of freedom; null where they are infinite or undefined.
    effective_degrees_of_freedom: Option<f64>,
    /// `finite`, `infinite` or `undefined`.
    degrees_of_freedom_state: String,
    /// Coverage probability.
    coverage: f64,
    /// Coverage factor.
    coverage_factor: f64,
    /// Expanded uncertainty.
    expanded_uncertainty: f64,
    /// Value minus and plus expanded uncertainty.
    interval: [f64; 2],
    /// Expanded uncertainty in per cent of the value; null at 0.
    relative_expanded_percent: Option<f64>,
}

/// The Monte Carlo method.
#[derive(Debug, Serialize, JsonSchema)]
struct MonteCarloJson {
    /// Trials.
    trials: u64,
    /// Seed.
    seed: u64,
    /// Mean of the trials.
    mean: f64,
    /// Their standard deviation.
    standard_uncertainty: f64,
    /// Interval with equal probability beyond either end.
    interval_symmetric: [f64; 2],
    /// Shortest interval.
    interval_shortest: [f64; 2],
    /// Trials in which no water passes the crest.
    trials_without_flow: u64,
    /// Trials in which a published table was left.
    trials_outside_table: u64,
    /// Trials in which the equation has no value, left out.
    trials_undefined: u64,
    /// Trials in which another branch of the equation holds than at the corrected inputs.
    trials_across_branch: u64,
    /// Base trials of the shares.
    share_base_trials: u64,
}

/// The comparison of both methods.
#[derive(Debug, Serialize, JsonSchema)]
struct AgreementJson {
    /// Numerical tolerance.
    tolerance: f64,
    /// Distance of the lower ends.
    difference_low: f64,
    /// Distance of the upper ends.
    difference_high: f64,
    /// Both are within the tolerance.
    linear_is_adequate: bool,
}

/// A source.
#[derive(Debug, Serialize, JsonSchema)]
struct SourceJson {
    /// Rank by contribution.
    rank: usize,
    /// Name.
    name: String,
    /// Keys of the inputs it acts on.
    acts_on: Vec<String>,
    /// Size as stated.
    size: String,
    /// When a new draw is made.
    fixed_until: String,
    /// Standard uncertainty of its error.
    standard_uncertainty: f64,
    /// SI unit of its error; `1` where it scales its inputs.
    unit: String,
    /// Degrees of freedom; null if taken as exactly known.
    degrees_of_freedom: Option<f64>,
    /// Derivative of the result by its error.
    sensitivity: f64,
    /// Absolute sensitivity times standard uncertainty.
    contribution: f64,
    /// Share of the variance by the linear method.
    share_linear: f64,
    /// First-order share by Monte Carlo, of the source or its correlated set; null without Monte Carlo.
    share_first_order: Option<f64>,
    /// Standard error of the first-order share.
    share_first_order_standard_error: Option<f64>,
    /// Total share by Monte Carlo.
    share_total: Option<f64>,
    /// Standard error of the total share.
    share_total_standard_error: Option<f64>,
    /// Standard uncertainty of the head that it makes, m; null if it does not act on the head.
    head_uncertainty_m: Option<f64>,
    /// Sources that it is correlated with.
    correlated_with: Vec<String>,
    /// The automatic source whose place it takes.
    replaces: Option<String>,
    /// It is published for use within limits that are not kept here.
    outside_limits: bool,
    /// What stands behind it.
    evidence: Option<String>,
    /// Date of the evidence.
    dated: Option<String>,
    /// Until when it holds.
    valid_until: Option<String>,
    /// Who published it, for an automatic source.
    published_by: Option<String>,
    /// How well that is known.
    confidence: Option<String>,
}

/// A known bias that was taken out.
#[derive(Debug, Serialize, JsonSchema)]
struct CorrectionJson {
    /// Where it comes from.
    name: String,
    /// Keys of the inputs that it is a bias of.
    acts_on: Vec<String>,
    /// Indicated minus true.
    bias: f64,
    /// SI unit of the bias.
    unit: String,
}

/// An input.
#[derive(Debug, Serialize, JsonSchema)]
struct InputJson {
    /// Key.
    key: String,
    /// Symbol in the equations.
    symbol: String,
    /// SI unit.
    unit: String,
    /// As indicated; null if left out.
    indicated: Option<f64>,
    /// With known biases taken out.
    corrected: Option<f64>,
}

/// A definition.
#[derive(Debug, Serialize, JsonSchema)]
struct EquationJson {
    /// Left-hand side.
    name: String,
    /// Right-hand side.
    text: String,
    /// Its value at the corrected inputs, in SI units; null where it has none.
    value: Option<f64>,
    /// The SI unit.
    unit: String,
}

/// A caveat.
#[derive(Debug, Serialize, JsonSchema)]
struct WarningJson {
    /// Its stable name.
    code: String,
    /// Its words.
    text: String,
}

/// A limit against what is there.
#[derive(Debug, Serialize, JsonSchema)]
struct LimitJson {
    /// `use`, `modular`, `critical` or `station`.
    kind: String,
    /// The quantity, in the symbols of the structure.
    quantity: String,
    /// What it is, in words.
    meaning: String,
    /// What is there, in SI units.
    value: f64,
    /// `>=` or `<=`.
    sign: String,
    /// The bound, in SI units.
    bound: f64,
    /// How far the value is on the right side; negative on the wrong one.
    margin: f64,
    /// The SI unit of all three.
    unit: String,
    /// It is kept.
    kept: bool,
    /// Indicated heads of the range at which it is not kept, from and to; null where that is not asked.
    fails_at_heads_m: Option<Vec<[f64; 2]>>,
    /// Who set it.
    standard: String,
    /// How well it is known, in words.
    confidence: String,
    /// It is quoted from memory.
    from_memory: bool,
}

/// Whether the flow is modular.
#[derive(Debug, Serialize, JsonSchema)]
struct HydraulicsJson {
    /// `modular`, `drowned` (by an equation for it), `not_modular` (without one) or `not_checked`.
    state: String,
    /// Corrected head of the tailwater above the crest; null where the file states none.
    tailwater_head_m: Option<f64>,
    /// The highest tailwater at which the flow is modular; null where sections differ or none is known.
    highest_modular_tailwater_head_m: Option<f64>,
    /// The drowned-flow factor in force; null where there is none, and for several sections.
    drowned_flow_factor: Option<f64>,
}

fn limit_value(state: &LimitState) -> LimitJson {
    let limit = &state.limit;
    let kind = match state.asked {
        Asked::Use => "use",
        Asked::Modular { .. } => "modular",
        Asked::Critical => "critical",
        Asked::Maximum | Asked::Gauge => "station",
    };
    LimitJson {
        kind: kind.to_owned(),
        quantity: limit.quantity.clone(),
        meaning: limit.meaning.clone(),
        value: state.value,
        sign: limit.side.sign().to_owned(),
        bound: state.bound,
        margin: state.margin,
        unit: state.unit.clone(),
        kept: state.kept,
        fails_at_heads_m: state.fails_at.clone(),
        standard: limit.source.document.to_owned(),
        confidence: limit.confidence.words().to_owned(),
        from_memory: limit.confidence.is_memory(),
    }
}

fn hydraulics_value(found: &Hydraulics) -> HydraulicsJson {
    let state = match found.state {
        FlowState::Modular => "modular",
        FlowState::Drowned => "drowned",
        FlowState::NotModular => "not_modular",
        FlowState::NotChecked => "not_checked",
    };
    HydraulicsJson {
        state: state.to_owned(),
        tailwater_head_m: found.tailwater_head,
        highest_modular_tailwater_head_m: found.highest_modular,
        drowned_flow_factor: found.factor,
    }
}

/// A budget as one JSON object.
pub fn budget_json(budget: &Budget) -> String {
    pretty(&budget_value(budget))
}

/// The JSON schema of a budget.
pub fn budget_schema() -> String {
    pretty(&schemars::schema_for!(BudgetJson))
}

/// The sheet of a structure as one JSON object.
pub fn sheet_json(sheet: &Sheet) -> String {
    pretty(sheet)
}

/// The list of structures as JSON.
pub fn sheets_json(sheets: &[Sheet]) -> String {
    pretty(&sheets)
}

fn pretty(value: &impl Serialize) -> String {
    // Maps with keys that are no texts, the one thing that fails, do not occur in these types.
    serde_json::to_string_pretty(value).unwrap_or_default() + "\n"
}

fn budget_value(budget: &Budget) -> BudgetJson {
    let linear = &budget.linear;
    let (freedom, state) = match linear.degrees_of_freedom {
        DegreesOfFreedom::Finite(freedom) => (Some(freedom), "finite"),
        DegreesOfFreedom::Infinite => (None, "infinite"),
        DegreesOfFreedom::Undefined => (None, "undefined"),
    };
    let expanded = budget.expanded_uncertainty;
    BudgetJson {
        station: budget.station.clone(),
        structure: budget.kind.clone(),
        regime: Some(budget.regime.clone()).filter(|regime| !regime.is_empty()),
        nappe_version: env!("CARGO_PKG_VERSION").to_owned(),
        station_digest: format!("sha256:{}", budget.digest),
        at: AtJson {
            head_m: budget.head,
            corrected_head_m: budget.corrected_head,
            month: budget.month,
            tailwater_head_m: budget.tailwater,
        },
        result: ResultJson {
            name: budget.result.name.clone(),
            unit: budget.result.unit.to_string(),
            value: linear.value,
            indicated: linear.indicated,
            known_bias: budget.result.known_bias,
        },
        linear: LinearJson {
            standard_uncertainty: linear.standard_uncertainty,
            effective_degrees_of_freedom: freedom,
            degrees_of_freedom_state: state.to_owned(),
            coverage: budget.coverage.probability(),
            coverage_factor: budget.coverage_factor,
            expanded_uncertainty: expanded,
            interval: [linear.value - expanded, linear.value + expanded],
            relative_expanded_percent: budget.result.relative_expanded_percent,
        },
        monte_carlo: monte_carlo_value(budget),
        agreement: budget.monte_carlo.as_ref().map(|part| AgreementJson {
            tolerance: part.agreement.tolerance,
            difference_low: part.agreement.difference_low,
            difference_high: part.agreement.difference_high,
            linear_is_adequate: part.agreement.linear_is_adequate(),
        }),
        sources: budget.rows.iter().map(source_value).collect(),
        corrections: budget
            .corrections
            .iter()
            .map(|each| CorrectionJson {
                name: each.name.clone(),
                acts_on: each.acts_on.clone(),
                bias: each.bias,
                unit: each.unit.clone(),
            })
            .collect(),
        inputs: budget
            .inputs
            .iter()
            .map(|input| InputJson {
                key: input.key.clone(),
                symbol: input.symbol.clone(),
                unit: input.unit.clone(),
                indicated: input.indicated,
                corrected: input.corrected,
            })
            .collect(),
        equations: budget
            .equations
            .iter()
            .map(|row| EquationJson {
                name: row.name.clone(),
                text: row.text.clone(),
                value: row.value,
                unit: row.unit.clone(),
            })
            .collect(),
        limits: budget.limits.iter().map(limit_value).collect(),
        hydraulics: budget.hydraulics.as_ref().map(hydraulics_value),
        warnings: budget
            .warnings
            .iter()
            .map(|warning| WarningJson {
                code: warning.code.as_str().to_owned(),
                text: warning.text.clone(),
            })
            .collect(),
    }
}

fn monte_carlo_value(budget: &Budget) -> Option<MonteCarloJson> {
    let part = budget.monte_carlo.as_ref()?;
    let statistics = part.result.outputs[0];
    Some(MonteCarloJson {
        trials: part.result.trials,
        seed: part.result.seed,
        mean: statistics.mean,
        standard_uncertainty: statistics.standard_uncertainty,
        interval_symmetric: statistics.intervals.symmetric,
        interval_shortest: statistics.intervals.shortest,
        trials_without_flow: part.result.tally.dry,
        trials_outside_table: part.result.tally.outside_table,
        trials_undefined: part.result.tally.undefined,
        trials_across_branch: part.result.tally.across,
        share_base_trials: part.base_trials,
    })
}

fn source_value(row: &BudgetRow) -> SourceJson {
    let (published_by, confidence) = row.published.clone().unzip();
    SourceJson {
        rank: row.rank,
        name: row.name.clone(),
        acts_on: row.acts_on.clone(),
        size: row.size.clone(),
        fixed_until: row.fixed_until.clone(),
        standard_uncertainty: row.standard_uncertainty,
        unit: row.unit.clone(),
        degrees_of_freedom: Some(row.degrees_of_freedom).filter(|freedom| freedom.is_finite()),
        sensitivity: row.sensitivity,
        contribution: row.contribution,
        share_linear: row.share_linear,
        share_first_order: row.share.map(|share| share.first_order),
        share_first_order_standard_error: row.share.map(|share| share.first_order_error),
        share_total: row.share.map(|share| share.total),
        share_total_standard_error: row.share.map(|share| share.total_error),
        head_uncertainty_m: row.head_uncertainty,
        correlated_with: row.correlated_with.clone(),
        replaces: row.replaces.clone(),
        outside_limits: row.outside_limits,
        evidence: row.evidence.evidence.clone(),
        dated: row.evidence.dated.clone(),
        valid_until: row.evidence.valid_until.clone(),
        published_by,
        confidence,
    }
}
