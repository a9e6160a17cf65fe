//! A budget as a page.

use super::document::Document;
use super::heads::heads_in_words;
use super::rounding::rounded;
use super::{CAUTION, FROM_MEMORY, UnitSystem};
use crate::propagation::{Coverage, DegreesOfFreedom};
use crate::station::Evidence;
use crate::study::{Budget, BudgetRow, Correction, EquationRow, FlowState, Hydraulics, InputRow};
use crate::units::{Dimension, Unit, significant, with_unit};

/// Lays out a budget.
pub fn budget_document(budget: &Budget, units: UnitSystem) -> Document {
    let mut page = Document::default();
    page.title(budget.station.clone());
    page.paragraph(what_it_is(budget));
    page.paragraph(where_it_is(budget, units));
    page.heading(format!("{} and its uncertainty", capitalised(&budget.result.name)));
    result_table(&mut page, budget, units);
    bias_lines(&mut page, budget, units);
    verdict(&mut page, budget, units);
    page.heading("Sources of uncertainty, ranked");
    source_table(&mut page, budget, units);
    page.paragraph(
        "Share: of the variance, by the linear method. Of head, and of the result: standard uncertainty.",
    );
    if !budget.corrections.is_empty() {
        page.heading("Known biases taken out");
        correction_table(&mut page, budget, units);
    }
    if !budget.warnings.is_empty() {
        page.heading("Warnings");
        page.warnings(&budget.warnings);
    }
    page.heading("To retrace");
    retrace_table(&mut page, budget);
    page.paragraph(
        "Sensitivity: change of the result for one unit of the error, in SI units (for 1, that is \
         100 %, where the source scales its input). Contribution = |sensitivity| x standard \
         uncertainty. Shares: linear; by Monte Carlo alone (first order) and with interactions (total).",
    );
    input_table(&mut page, budget);
    page.lines(budget.equations.iter().map(equation_line));
    number_table(&mut page, budget);
    hydraulics(&mut page, budget);
    limit_table(&mut page, budget);
    if budget.rows.iter().any(|row| row.published.is_some()) || !budget.limits.is_empty() {
        page.paragraph(FROM_MEMORY);
    }
    page.paragraph(how_computed(budget));
    page.paragraph(CAUTION);
    page
}

fn capitalised(text: &str) -> String {
    let mut letters = text.chars();
    letters.next().map_or_else(String::new, |first| first.to_uppercase().chain(letters).collect())
}

fn what_it_is(budget: &Budget) -> String {
    let text = &budget.title;
    if budget.standard.is_empty() { text.clone() } else { format!("{text}; {}", budget.standard) }
}

fn where_it_is(budget: &Budget, units: UnitSystem) -> String {
    let unit = units.head();
    let head = |metres: f64| format!("{} {unit}", significant(unit.from_si(metres), 5));
    let month = budget.month.map_or_else(String::new, |month| format!("; month {month}"));
    match (budget.head, budget.corrected_head) {
        (Some(indicated), Some(corrected)) if indicated != corrected => {
            format!("Indicated head {}, corrected {}{month}", head(indicated), head(corrected))
        }
        (Some(indicated), _) => format!("Indicated head {}{month}", head(indicated)),
        (None, _) => format!("No head is read{month}"),
    }
}

/// The unit of the result on this page.
fn result_unit(budget: &Budget, units: UnitSystem) -> Unit {
    let result = &budget.result;
    units.result(result.unit.dimension(), result.value, result.stated_unit.as_ref())
}

fn result_table(page: &mut Document, budget: &Budget, units: UnitSystem) {
    let unit = result_unit(budget, units);
    let show = |value: f64| unit.from_si(value);
    let linear = &budget.linear;
    let both = rounded(show(linear.value), show(linear.standard_uncertainty));
    let expanded = show(budget.expanded_uncertainty);
    let ends = rounded(show(linear.value), expanded);
    let percent = budget.result.relative_expanded_percent;
    let linear_column = [
        format!("{} {unit}", both.value),
        format!("{} {unit}", both.uncertainty),
        freedom_words(linear.degrees_of_freedom),
        factor_words(budget),
        format!("{} {unit}{}", ends.uncertainty, percent_words(percent)),
        format!(
            "{} to {} {unit}",
            ends.like(show(linear.value) - expanded),
            ends.like(show(linear.value) + expanded)
        ),
        String::from("-"),
    ];
    let monte_carlo_column = budget.monte_carlo.as_ref().map(|part| {
        let statistics = part.result.outputs[0];
        let [mean, u] = [statistics.mean, statistics.standard_uncertainty].map(show);
        let both = rounded(mean, u);
        let half = |interval: [f64; 2]| show((interval[1] - interval[0]) / 2.0);
        let [symmetric, shortest] = [statistics.intervals.symmetric, statistics.intervals.shortest];
        let ends = rounded(mean, half(symmetric));
        let range = |interval: [f64; 2]| {
            format!("{} to {} {unit}", ends.like(show(interval[0])), ends.like(show(interval[1])))
        };
        let relative = 100.0 * (half(symmetric) / show(linear.value)).abs();
        let relative = relative.is_finite().then_some(relative);
        [
            format!("{} {unit} (mean)", both.value),
            format!("{} {unit}", both.uncertainty),
            "-".to_owned(),
            "-".to_owned(),
            format!("half the interval: {} {unit}{}", ends.uncertainty, percent_words(relative)),
            range(symmetric),
            range(shortest),
        ]
    });
    let labels = [
        format!("corrected {}", budget.result.name),
        "standard uncertainty".to_owned(),
        "effective degrees of freedom".to_owned(),
        "coverage factor".to_owned(),
        "expanded uncertainty".to_owned(),
        "coverage interval, symmetric".to_owned(),
        "coverage interval, shortest".to_owned(),
    ];
    let rows = labels
        .into_iter()
        .enumerate()
        .map(|(row, label)| {
            let mut cells = vec![label, linear_column[row].clone()];
            cells.extend(monte_carlo_column.as_ref().map(|column| column[row].clone()));
            cells
        })
        // Without the Monte Carlo method there is no shortest interval to show.
        .filter(|cells| cells.len() > 2 || cells[1] != "-")
        .collect();
    let mut columns = vec!["", "linear method (JCGM 100)"];
    if budget.monte_carlo.is_some() {
        columns.push("Monte Carlo method (JCGM 101)");
    }
    page.table(&columns, rows);
}

fn percent_words(percent: Option<f64>) -> String {
    percent.map_or_else(String::new, |percent| format!(" ({} %)", significant(percent, 3)))
}

fn freedom_words(freedom: DegreesOfFreedom) -> String {
    match freedom {
        DegreesOfFreedom::Finite(freedom) => significant(freedom, 3),
        DegreesOfFreedom::Infinite => "infinite".to_owned(),
        DegreesOfFreedom::Undefined => "undefined (correlated)".to_owned(),
    }
}

fn factor_words(budget: &Budget) -> String {
    let k = significant(budget.coverage_factor, 3);
    let percent = significant(100.0 * budget.coverage.probability(), 4);
    match (budget.coverage, budget.linear.degrees_of_freedom) {
        (Coverage::Factor(_), _) => format!("{k} as asked (about {percent} %)"),
        (Coverage::Probability(_), DegreesOfFreedom::Finite(_)) => format!("{k} (t, {percent} %)"),
        (Coverage::Probability(_), _) => format!("{k} (normal, {percent} %)"),
    }
}

fn bias_lines(page: &mut Document, budget: &Budget, units: UnitSystem) {
    if budget.corrections.is_empty() {
        return;
    }
    let unit = result_unit(budget, units);
    let shown = rounded(
        unit.from_si(budget.result.indicated),
        unit.from_si(budget.linear.standard_uncertainty),
    );
    let side = if budget.result.known_bias >= 0.0 { "high" } else { "low" };
    let size = budget.result.relative_bias_percent.map_or_else(String::new, |percent| {
        format!("; it reads {side} by {} %", significant(percent.abs(), 3))
    });
    page.paragraph(format!(
        "As indicated, known biases left in: {} {unit}{size}. Both methods take them out.",
        shown.value
    ));
}

fn verdict(page: &mut Document, budget: &Budget, units: UnitSystem) {
    let Some(part) = &budget.monte_carlo else {
        page.paragraph("The Monte Carlo method was left out: the linear method is not verified.");
        return;
    };
    let unit = result_unit(budget, units);
    let show = |value: f64| format!("{} {unit}", significant(unit.from_si(value), 2));
    let verdict = if part.agreement.linear_is_adequate() { "adequate" } else { "not adequate" };
    page.paragraph(format!(
        "The linear method is {verdict} here (JCGM 101 clause 8): the ends of the two intervals \
         differ by {} (lower) and {} (upper), against a tolerance of {}.",
        show(part.agreement.difference_low),
        show(part.agreement.difference_high),
        show(part.agreement.tolerance)
    ));
}

/// A bar of eighths of a character, ten characters for a whole.
fn bar(share: f64) -> String {
    const EIGHTHS: [&str; 8] = ["", "▏", "▎", "▍", "▌", "▋", "▊", "▉"];
    let eighths = (share.clamp(0.0, 1.0) * 80.0).round() as usize;
    format!("{}{}", "█".repeat(eighths / 8), EIGHTHS[eighths % 8])
}

fn source_table(page: &mut Document, budget: &Budget, units: UnitSystem) {
    let unit = units.head_error();
    let rows = budget
        .rows
        .iter()
        .map(|row| {
            let head = row
                .head_uncertainty
                .map_or_else(|| "-".to_owned(), |metres| significant(unit.from_si(metres), 3));
            vec![
                row.rank.to_string(),
                format!("{:>4.1} %", 100.0 * row.share_linear),
                bar(row.share_linear),
                source_words(row),
                // With blanks for the underscores of the keys, so that they break between words.
                row.acts_on.join(", ").replace('_', " "),
                row.size.clone(),
                head,
                row.contribution_percent
                    .map_or_else(|| "-".to_owned(), |percent| significant(percent, 3)),
                row.fixed_until.clone(),
            ]
        })
        .collect();
    let head = format!("#{unit} of head");
    let of_flow = format!("#% of {}", budget.result.name);
    page.table(
        &[
            "#rank",
            "#share",
            "",
            "source",
            "acts on",
            "size as stated",
            &head,
            &of_flow,
            "fixed until",
        ],
        rows,
    );
}

fn source_words(row: &BudgetRow) -> String {
    let mut text = row.name.clone();
    if row.outside_limits {
        text.push_str(" [outside limits of use]");
    }
    if let Some(replaced) = row.replaces.as_ref().filter(|replaced| **replaced != row.name) {
        text = format!("{text} [replaces {replaced}]");
    }
    if !row.correlated_with.is_empty() {
        text = format!("{text} [correlated with {}]", row.correlated_with.join(", "));
    }
    text
}

fn correction_table(page: &mut Document, budget: &Budget, units: UnitSystem) {
    let head_error = units.head_error();
    let rows = budget
        .corrections
        .iter()
        .map(|Correction { name, acts_on, bias, unit, effect_percent }| {
            let size = if unit == "1" {
                format!("{} %", significant(100.0 * bias, 3))
            } else if unit == "m" {
                format!("{} {head_error}", significant(head_error.from_si(*bias), 3))
            } else {
                format!("{} {unit}", significant(*bias, 3))
            };
            let effect =
                effect_percent.map_or_else(|| "-".to_owned(), |percent| significant(percent, 3));
            vec![name.clone(), acts_on.join(", "), size, effect]
        })
        .collect();
    let of_flow = format!("#left in, the {} is off by [%]", budget.result.name);
    page.table(&["source", "bias of", "#indicated minus true", &of_flow], rows);
}

fn retrace_table(page: &mut Document, budget: &Budget) {
    let monte_carlo = budget.monte_carlo.is_some();
    let rows = budget
        .rows
        .iter()
        .map(|row| {
            let freedom = if row.degrees_of_freedom.is_finite() {
                significant(row.degrees_of_freedom, 4)
            } else {
                "infinite".to_owned()
            };
            let mut cells = vec![
                row.rank.to_string(),
                row.name.clone(),
                with_unit(significant(row.standard_uncertainty, 5), &row.unit),
                freedom,
                significant(row.sensitivity, 5),
                significant(row.contribution, 5),
                format!("{:.4}", row.share_linear),
            ];
            if let Some(share) = row.share {
                cells.push(format!("{:.3} ± {:.3}", share.first_order, share.first_order_error));
                cells.push(format!("{:.3} ± {:.3}", share.total, share.total_error));
            }
            cells.push(basis(row));
            cells
        })
        .collect();
    let contribution = format!("#contribution [{}]", budget.result.unit);
    let mut columns = vec![
        "#rank",
        "source",
        "#standard uncertainty",
        "#degrees of freedom",
        "#sensitivity",
        &contribution,
        "#share",
    ];
    if monte_carlo {
        columns.extend(["#first order", "#total"]);
    }
    columns.push("basis");
    page.table(&columns, rows);
}

/// What stands behind a row: a publication, or the station's evidence.
fn basis(row: &BudgetRow) -> String {
    match &row.published {
        Some((document, confidence)) => format!("{document}: {confidence}"),
        None => evidence_words(&row.evidence),
    }
}

fn evidence_words(evidence: &Evidence) -> String {
    let parts = [
        evidence.evidence.clone(),
        evidence.dated.as_ref().map(|date| format!("dated {date}")),
        evidence.valid_until.as_ref().map(|date| format!("valid until {date}")),
    ];
    let parts: Vec<String> = parts.into_iter().flatten().collect();
    if parts.is_empty() { "not stated".to_owned() } else { parts.join(", ") }
}

fn input_table(page: &mut Document, budget: &Budget) {
    let rows = budget
        .inputs
        .iter()
        .map(|InputRow { key, symbol, stated, indicated, corrected, unit, evidence }| {
            let number = |value: &Option<f64>| match value {
                Some(value) => with_unit(significant(*value, 6), unit),
                None => "left out".to_owned(),
            };
            let stated = match (stated.as_str(), key.as_str()) {
                ("", "head" | "tailwater_head") => "asked for".to_owned(),
                ("", _) => "default".to_owned(),
                (stated, _) => stated.to_owned(),
            };
            let evidence = evidence_words(evidence);
            vec![
                key.clone(),
                symbol.clone(),
                stated,
                number(indicated),
                number(corrected),
                evidence,
            ]
        })
        .collect();
    page.table(&["input", "symbol", "as stated", "#indicated", "#corrected", "evidence"], rows);
}

fn equation_line(row: &EquationRow) -> String {
    let EquationRow { name, text, value, unit } = row;
    match value {
        Some(value) => format!("{name} = {text}  =  {}", with_unit(significant(*value, 6), unit)),
        None => format!("{name} = {text}"),
    }
}

fn number_table(page: &mut Document, budget: &Budget) {
    if !budget.numbers.is_empty() {
        let rows = budget.numbers.iter().map(|cells| cells.to_vec()).collect();
        page.table(&["published number in the equation", "source", "confidence"], rows);
    }
}

fn limit_table(page: &mut Document, budget: &Budget) {
    if budget.limits.is_empty() {
        return;
    }
    let rows = budget
        .limits
        .iter()
        .map(|state| {
            let limit = &state.limit;
            let number = |value: f64| with_unit(significant(value, 4), &state.unit);
            vec![
                limit.quantity.clone(),
                limit.meaning.clone(),
                number(state.value),
                format!("{} {}", limit.side.sign(), number(state.bound)),
                number(state.margin),
                if state.kept { "kept".to_owned() } else { "NOT KEPT".to_owned() },
                state.fails_at.as_ref().map_or_else(
                    || "-".to_owned(),
                    |heads| heads_in_words(heads, &Unit::si(Dimension::LENGTH)),
                ),
                format!("{}, {}", limit.source.document, limit.confidence.words()),
            ]
        })
        .collect();
    page.table(
        &[
            "limit",
            "what it is",
            "#here",
            "#limit",
            "#margin",
            "",
            "heads at which it fails",
            "source",
        ],
        rows,
    );
}

/// What is known of the flow at the control: modular, critical.
fn hydraulics(page: &mut Document, budget: &Budget) {
    let Some(Hydraulics { state, tailwater_head, highest_modular, factor, limit }) =
        &budget.hydraulics
    else {
        return;
    };
    let metres = |value: f64| format!("{} m", significant(value, 4));
    let up_to = highest_modular.map_or_else(
        || "as each section's limit says".to_owned(),
        |highest| format!("up to a tailwater head of {} above the crest", metres(highest)),
    );
    let tailwater = tailwater_head.map_or_else(String::new, metres);
    let text = match state {
        FlowState::NotChecked => format!(
            "Modular flow is taken for granted: the file states no [tailwater]. It is modular {up_to}."
        ),
        FlowState::Modular => {
            let already =
                factor.filter(|factor| *factor < 1.0).map_or_else(String::new, |factor| {
                    format!(" The drowned-flow factor is {} already.", significant(factor, 4))
                });
            format!("The flow is modular {up_to}; the tailwater head is {tailwater}.{already}")
        }
        FlowState::Drowned => format!(
            "The flow is DROWNED: it is modular {up_to}, and the tailwater head is {tailwater}. \
             Drowned-flow factor {}.",
            factor.map_or_else(|| "of each section".to_owned(), |factor| significant(factor, 4))
        ),
        FlowState::NotModular => format!(
            "The flow is NOT MODULAR: it would be {up_to}, and the tailwater head is {tailwater}. The \
             discharge above is too high."
        ),
    };
    page.paragraph(text);
    page.paragraph(format!("Modular limit: {limit}."));
}

fn how_computed(budget: &Budget) -> String {
    let version = env!("CARGO_PKG_VERSION");
    let digest: String = budget.digest.chars().take(16).collect();
    let monte_carlo = budget.monte_carlo.as_ref().map_or_else(String::new, |part| {
        format!(
            " Monte Carlo: {} trials, seed {}; shares from {} base trials.",
            part.result.trials, part.result.seed, part.base_trials
        )
    });
    format!("nappe {version}; station file sha256 {digest}...{monte_carlo}")
}
