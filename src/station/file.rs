//! The station file as a whole.

use std::collections::BTreeMap;

use sha2::{Digest, Sha256};
use toml::Spanned;
use toml::de::{DeTable, DeValue};

use super::correlation::{self, StatedCorrelation};
use super::head::{self, Head};
use super::section::{Findings, Section};
use super::source::{self, ErrorSource};
use super::spread::Spread;
use super::structure::{self, Kind, StationInput, StructureSection};
use super::tailwater::{self, Tailwater};
use crate::diagnostic::{Code, Diagnostic, Severity, Span, Warning};
use crate::model::structures::{COEFFICIENT_FACTOR, Unstated};
use crate::propagation::{Correlation, Distribution, Problem, Source, impossible};

/// A station, read and checked.
#[derive(Clone, Debug)]
pub struct Station {
    /// Its name.
    pub name: String,
    /// SHA-256 of the file, as hexadecimal digits.
    pub digest: String,
    /// Its structure.
    pub kind: Kind,
    /// The inputs of its equation, in the order of the model.
    pub inputs: Vec<StationInput>,
    /// What the file says of the head; `None` for an equation without one.
    pub head: Option<Head>,
    /// Where the level of the tailwater comes from; `None` if the file says nothing.
    pub tailwater: Option<Tailwater>,
    /// The stated sources, in the order of the file.
    pub sources: Vec<ErrorSource>,
    /// Correlations between sources, by name.
    pub correlations: Vec<([String; 2], f64)>,
    /// What is doubtful about the file.
    pub warnings: Vec<Warning>,
}

/// Larger files are no station files: a thousand sources fit many times over.
pub const MAX_BYTES: u64 = 1024 * 1024;

/// Sources beyond this number are a mistake, and would make the work unbounded.
const MOST_SOURCES: usize = 500;
/// Faults shown of one file; a junk file could have millions.
const MOST_FINDINGS: usize = 50;

/// Reads a station file.
///
/// Gives the station if no error was found, and everything that was: errors, or warnings that stand
/// beside a station.
///
/// ```
/// let text = r#"
/// name = "Lock Marsh"
/// [structure]
/// kind = "thin-plate-triangular"
/// notch_angle = "90 deg"
/// crest_height = "0,45 m"
/// approach_width = "1.2 m"
/// "#;
/// let (station, findings) = nappe::station::read(text.as_bytes());
/// assert!(station.is_none());
/// assert_eq!(findings[0].code.as_str(), "decimal_comma");
/// ```
pub fn read(bytes: &[u8]) -> (Option<Station>, Vec<Diagnostic>) {
    if bytes.len() as u64 > MAX_BYTES {
        return (None, vec![too_large(bytes.len() as u64)]);
    }
    // A byte-order mark is no part of the text.
    let content = bytes.strip_prefix(b"\xef\xbb\xbf").unwrap_or(bytes);
    let offset = bytes.len() - content.len();
    let text = match std::str::from_utf8(content) {
        Ok(text) => text,
        Err(error) => return (None, vec![not_text(content, error.valid_up_to())]),
    };
    if text.trim().is_empty() {
        let empty = Diagnostic::about_file(Code::EmptyFile, "the file is empty")
            .help("`nappe new KIND` prints one to start from");
        return (None, vec![empty]);
    }
    let mut findings = Findings::new(text);
    let station = read_text(text, &mut findings).map(|mut station| {
        station.digest = hexadecimal(&Sha256::digest(bytes));
        station
    });
    let mut list = findings.list;
    list.sort_by_key(|diagnostic| diagnostic.labels.first().map_or(0, |label| label.span.start));
    let left_out = list.len().saturating_sub(MOST_FINDINGS);
    list.truncate(MOST_FINDINGS);
    if left_out > 0 {
        let title = format!("{left_out} more findings are not shown");
        list.push(
            Diagnostic::about_file(Code::TooManyFindings, title).help("mend the first ones first"),
        );
    }
    for diagnostic in &mut list {
        shift(diagnostic, offset);
    }
    let failed = list.iter().any(|diagnostic| diagnostic.severity == Severity::Error);
    (station.filter(|_| !failed), list)
}

/// The diagnostic for a file that is too large, by its size in bytes.
pub(crate) fn too_large(bytes: u64) -> Diagnostic {
    Diagnostic::about_file(
        Code::FileTooLarge,
        format!("the file has {bytes} bytes; a station file has at most {MAX_BYTES}"),
    )
    .help("records and gaugings stand in files of their own")
}

fn not_text(content: &[u8], valid: usize) -> Diagnostic {
    let line = content[..valid].split(|byte| *byte == b'\n').count();
    Diagnostic::about_file(
        Code::NotText,
        format!("the file is not UTF-8 text: byte {} on line {line}", valid + 1),
    )
    .help("save it as UTF-8")
}

fn hexadecimal(bytes: &[u8]) -> String {
    use std::fmt::Write;

    bytes.iter().fold(String::new(), |mut text, byte| {
        // Writing to a String cannot fail.
        let _ = write!(text, "{byte:02x}");
        text
    })
}

fn shift(diagnostic: &mut Diagnostic, offset: usize) {
    let move_span = |span: &mut Span| *span = span.start + offset..span.end + offset;
    for label in &mut diagnostic.labels {
        move_span(&mut label.span);
    }
    if let Some(fix) = &mut diagnostic.fix {
        move_span(&mut fix.span);
    }
}

fn read_text(text: &str, findings: &mut Findings<'_>) -> Option<Station> {
    let (document, errors) = DeTable::parse_recoverable(text);
    report_syntax(text, &errors, findings);
    if !findings.list.is_empty() {
        return None;
    }
    let mut root = Section::new("the file", 0..0, document.get_ref());
    let name = root.need("name", "for example name = \"Lock Marsh, outfall\"", findings).and_then(
        |value| {
            let name = super::section::string("name", value, findings)?;
            source::check_name("the station", &name, &value.span(), findings);
            Some(name)
        },
    );
    let structure = root
        .need("structure", "`nappe new KIND` prints a file to start from", findings)
        .and_then(|value| Section::of("[structure]", value, findings))
        .and_then(|section| structure::read(section, findings));
    let head_section = root.get("head");
    let head = head_section
        .and_then(|value| Section::of("[head]", value, findings))
        .map(|section| head::read(section, findings));
    let tailwater_section = root.get("tailwater");
    let stated_sources = tables("error_source", &mut root, findings);
    let stated_correlations = tables("correlation", &mut root, findings);
    root.finish(findings);
    let stated_names: Vec<String> =
        stated_sources.iter().filter_map(|section| section.peek("name")).collect();
    let Some(StructureSection { mut kind, mut inputs, unused }) = structure else {
        // What can be told of the sources without knowing the inputs is told all the same.
        for section in stated_sources {
            source::read(section, None, findings);
        }
        return None;
    };
    let reads_head = match &kind {
        Kind::Catalogue(_) => true,
        Kind::Own(equation) => equation.reads_head,
    };
    if let Some(value) = head_section.filter(|_| !reads_head) {
        findings.push(
            Diagnostic::error(Code::UnusedKey, value.span(), "[head]: this equation reads no head")
                .help("an input of the equation is the head if it says so: h = \"head\""),
        );
    }
    let tailwater =
        tailwater_section.and_then(|value| read_tailwater(value, &mut kind, &mut inputs, findings));
    let automatic = automatic_sources(&kind);
    let replaceable = automatic;
    let automatic: Vec<String> = replaceable.iter().map(|(name, _)| name.clone()).collect();
    let sources: Vec<ErrorSource> = stated_sources
        .into_iter()
        .filter_map(|section| source::read(section, Some((&inputs, &automatic)), findings))
        .collect();
    check_names(&sources, &inputs, &automatic, findings);
    let mut names = all_names(&sources, &inputs, &automatic);
    let faulty: Vec<String> =
        stated_names.into_iter().filter(|name| !names.contains(name)).collect();
    let any_faulty = !faulty.is_empty();
    // A source that has a fault is there all the same: its correlations are no fault of theirs.
    names.extend(faulty);
    let stated: Vec<StatedCorrelation> = stated_correlations
        .into_iter()
        .filter_map(|section| correlation::read(section, &names, findings))
        .collect();
    if !any_faulty {
        check_correlations(&stated, &names, findings);
    }
    let mut warnings = warnings(&sources, &inputs, &unused);
    warnings.extend(misplaced_replacements(&replaceable, &sources, &inputs));
    warnings.extend(unstated(&kind, &sources, &inputs));
    warnings.extend(bare_factors(&sources, &inputs));
    let correlations = stated.into_iter().map(|each| (each.names, each.coefficient)).collect();
    let head = reads_head.then(|| head.unwrap_or_default());
    Some(Station {
        name: name?,
        digest: String::new(),
        kind,
        inputs,
        head,
        tailwater,
        sources,
        correlations,
        warnings,
    })
}

/// What the file breaks of TOML's rules: the first of each line, and a few lines at the most, as one slip
/// makes nonsense of much that follows.
fn report_syntax(text: &str, errors: &[toml::de::Error], findings: &mut Findings<'_>) {
    const MOST: usize = 5;

    let mut last_start: Option<usize> = None;
    for error in errors {
        let span = error.span().unwrap_or(0..0);
        let between = last_start.and_then(|last| text.get(last..span.start));
        if between.is_some_and(|between| !between.contains('\n')) {
            continue;
        }
        if findings.list.len() >= MOST {
            break;
        }
        last_start = Some(span.start);
        let message = error.message().lines().next().unwrap_or("cannot be read").to_owned();
        let help = if text.trim_start().starts_with('{') {
            "a station file is TOML, not JSON"
        } else if !text.contains('\n') && text.contains('\r') {
            "the lines end in carriage returns alone: save the file with usual line ends"
        } else if message.contains("duplicate key") {
            "each key stands once in its table; for several sources write [[error_source]]"
        } else {
            "a line is key = value, texts stand in quotes, tables in [brackets]"
        };
        findings.push(Diagnostic::error(Code::Syntax, span, message).help(help));
    }
}

/// The tables of a list such as `[[error_source]]`.
fn tables<'a, 'i>(
    key: &str,
    root: &mut Section<'a, 'i>,
    findings: &mut Findings<'_>,
) -> Vec<Section<'a, 'i>> {
    let Some(value) = root.get(key) else { return Vec::new() };
    let DeValue::Array(items) = value.get_ref() else {
        findings.push(
            Diagnostic::error(
                Code::WrongType,
                value.span(),
                format!("`{key}` is a list of tables, each under its own [[{key}]]"),
            )
            .help(format!("write [[{key}]] with two brackets")),
        );
        return Vec::new();
    };
    if items.len() > MOST_SOURCES {
        let title = format!("{} tables [[{key}]]: at most {MOST_SOURCES} are read", items.len());
        findings.error(Code::OutsideDomain, value.span(), title);
        return Vec::new();
    }
    items.iter().filter_map(|item| Section::of(format!("[[{key}]]"), item, findings)).collect()
}

fn read_tailwater(
    value: &Spanned<DeValue<'_>>,
    kind: &mut Kind,
    inputs: &mut Vec<StationInput>,
    findings: &mut Findings<'_>,
) -> Option<Tailwater> {
    let Kind::Catalogue(installation) = kind else {
        findings.push(
            Diagnostic::error(
                Code::UnusedKey,
                value.span(),
                "[tailwater]: an equation of your own has its tailwater as an input",
            )
            .help("write it into the definitions, with an input for its level"),
        );
        return None;
    };
    let section = Section::of("[tailwater]", value, findings)?;
    tailwater::read(section, installation, inputs, findings)
}

/// Name of each source that a structure brings with it, and the key of the input it acts on.
fn automatic_sources(kind: &Kind) -> Vec<(String, String)> {
    match kind {
        Kind::Catalogue(installation) => installation.automatic_sources(),
        Kind::Own(_) => Vec::new(),
    }
}

/// The name of the source that an input's observations make.
pub(super) fn observations_name(input: &StationInput) -> String {
    format!("{} observations", input.key)
}

/// All sources by name, automatic ones that are replaced left out.
fn all_names(
    sources: &[ErrorSource],
    inputs: &[StationInput],
    automatic: &[String],
) -> Vec<String> {
    let replaced = |name: &String| sources.iter().any(|s| s.replaces.as_ref() == Some(name));
    let observed = inputs.iter().filter(|input| !input.observations.is_empty());
    sources
        .iter()
        .map(|source| source.name.clone())
        .chain(observed.map(observations_name))
        .chain(automatic.iter().filter(|name| !replaced(name)).cloned())
        .collect()
}

fn check_names(
    sources: &[ErrorSource],
    inputs: &[StationInput],
    automatic: &[String],
    findings: &mut Findings<'_>,
) {
    let mut seen: BTreeMap<&str, Span> = BTreeMap::new();
    let mut replaced: BTreeMap<&str, Span> = BTreeMap::new();
    for source in sources {
        if let Some(first) = seen.insert(&source.name, source.span.clone()) {
            findings.push(
                Diagnostic::error(
                    Code::DuplicateName,
                    source.span.clone(),
                    format!("two sources have the name `{}`", source.name),
                )
                .context(first, "the first is here")
                .help("names are unique: every table and every correlation goes by them"),
            );
        }
        let own = source.replaces.as_deref() == Some(source.name.as_str());
        let observed = inputs.iter().filter(|input| !input.observations.is_empty());
        let reserved = automatic.contains(&source.name)
            || source.name == super::setting::SURVEYED_ZERO
            || observed.map(observations_name).any(|name| name == source.name);
        if reserved && !own {
            findings.push(
                Diagnostic::error(
                    Code::DuplicateName,
                    source.span.clone(),
                    format!("`{}` is the name of an automatic source", source.name),
                )
                .help("give it another name, or say replaces = \"...\" if it takes its place"),
            );
        }
        if let Some(name) = &source.replaces
            && let Some(first) = replaced.insert(name, source.span.clone())
        {
            findings.push(
                Diagnostic::error(
                    Code::DuplicateName,
                    source.span.clone(),
                    format!("two sources replace `{name}`"),
                )
                .context(first, "the first is here"),
            );
        }
    }
}

/// Whether the coefficients can hold together: asked of a problem that has only them.
fn check_correlations(stated: &[StatedCorrelation], names: &[String], findings: &mut Findings<'_>) {
    let place = |name: &String| names.iter().position(|known| known == name).unwrap_or(0);
    let mut pairs: BTreeMap<[usize; 2], Span> = BTreeMap::new();
    for each in stated {
        let mut pair = [place(&each.names[0]), place(&each.names[1])];
        pair.sort_unstable();
        if let Some(first) = pairs.insert(pair, each.span.clone()) {
            let title = format!("`{}` and `{}` are correlated twice", each.names[0], each.names[1]);
            findings.push(
                Diagnostic::error(Code::DuplicateName, each.span.clone(), title)
                    .context(first, "the first is here"),
            );
        }
    }
    let Some(pair) = impossible(&bare_problem(stated, names)).map(|error| error.pair) else {
        return;
    };
    let named = pair.map(|source| names[source].clone());
    let culprit = stated
        .iter()
        .find(|each| named.iter().all(|name| each.names.contains(name)))
        .or(stated.iter().rev().find(|each| each.names.contains(&named[1])));
    let span = culprit.map_or(0..0, |each| each.span.clone());
    findings.push(
        Diagnostic::error(
            Code::CorrelationNotPossible,
            span,
            format!(
                "the correlation of `{}` and `{}` is at odds with the other coefficients",
                named[0], named[1]
            ),
        )
        .help(
            "no errors can have all these coefficients at once: if a goes with b and b with c, then \
             a goes with c as well",
        ),
    );
}

fn bare_problem(stated: &[StatedCorrelation], names: &[String]) -> Problem {
    let place = |name: &String| names.iter().position(|known| known == name).unwrap_or(0);
    let blueprint = crate::model::Blueprint {
        definitions: vec![("y".to_owned(), "0".to_owned())],
        result: "y".to_owned(),
        ..crate::model::Blueprint::default()
    };
    // A constant model has no fault.
    let model =
        crate::model::Model::build(&blueprint).unwrap_or_else(|_| unreachable!("a constant"));
    Problem {
        outputs: vec![model.result()],
        model,
        indicated: Vec::new(),
        sources: names
            .iter()
            .map(|name| Source {
                name: name.clone(),
                effects: Vec::new(),
                distribution: Distribution::Fixed { mean: 0.0 },
                degrees_of_freedom: f64::INFINITY,
            })
            .collect(),
        correlations: stated
            .iter()
            .map(|each| Correlation {
                sources: [place(&each.names[0]), place(&each.names[1])],
                coefficient: each.coefficient,
            })
            .collect(),
    }
}

/// Sources that take the place of an automatic one but act on another input: what that one stood for is
/// then in nobody's hands.
fn misplaced_replacements(
    automatic: &[(String, String)],
    sources: &[ErrorSource],
    inputs: &[StationInput],
) -> Vec<Warning> {
    let mut warnings = Vec::new();
    for source in sources {
        let replaced = automatic.iter().find(|each| source.replaces.as_ref() == Some(&each.0));
        let Some((replaced, acts_on)) = replaced else { continue };
        if !source.inputs.iter().any(|input| inputs[*input].key == *acts_on) {
            warnings.push(Warning::new(
                Code::ReplacedElsewhere,
                format!(
                    "`{}` replaces `{}` but does not act on `{}`: no source is left for that",
                    source.name, replaced, acts_on
                ),
            ));
        }
    }
    warnings
}

/// Coefficients whose uncertainty nobody publishes and that no source of the file acts on; a drowned-flow
/// factor likewise.
fn unstated(kind: &Kind, sources: &[ErrorSource], inputs: &[StationInput]) -> Vec<Warning> {
    let Kind::Catalogue(installation) = kind else { return Vec::new() };
    let acted_on = |key: &String| {
        sources.iter().any(|source| source.inputs.iter().any(|input| inputs[*input].key == *key))
    };
    installation
        .unstated()
        .into_iter()
        // What counts in drowned flow only is said where the flow is drowned.
        .filter(|each| !each.when_drowned && !each.inputs.iter().any(acted_on))
        .map(|each| unstated_warning(&each))
        .collect()
}

/// The warning of a coefficient that no source acts on.
pub(crate) fn unstated_warning(unstated: &Unstated) -> Warning {
    let keys: Vec<String> = unstated.inputs.iter().map(|key| format!("`{key}`")).collect();
    let text = format!("no source acts on {}: {}", keys.join(" or "), unstated.why);
    Warning::new(Code::NoCoefficientSource, text)
}

/// A factor on a published coefficient that nothing stands behind.
fn bare_factors(sources: &[ErrorSource], inputs: &[StationInput]) -> Vec<Warning> {
    let calibrated = sources.iter().any(|source| source.replaces.is_some());
    inputs
        .iter()
        .filter(|input| input.key.ends_with(COEFFICIENT_FACTOR.key) && !calibrated)
        .filter(|input| input.value.is_some_and(|value| value != 1.0))
        .filter(|input| input.evidence.evidence.is_none())
        .map(|input| {
            let text = format!(
                "`{}` is {} with nothing behind it, and the published uncertainty is still that of the \
                 published coefficient: state its evidence, or the calibration as a source that replaces it",
                input.key, input.text
            );
            Warning::new(Code::BareFactor, text)
        })
        .collect()
}

fn warnings(
    sources: &[ErrorSource],
    inputs: &[StationInput],
    unused: &[(String, &'static str)],
) -> Vec<Warning> {
    let mut warnings = Vec::new();
    for (key, why) in unused {
        warnings.push(Warning::new(Code::UnusedKey, format!("`{key}` has no effect: {why}")));
    }
    let head = inputs.iter().position(|input| input.key == "head");
    let acts_on_head =
        |source: &ErrorSource| head.is_some_and(|head| source.inputs.contains(&head));
    if head.is_some() && !sources.iter().any(acts_on_head) {
        warnings.push(Warning::new(
            Code::NoHeadSource,
            "no source acts on the head: its error is usually the largest, and is missing here",
        ));
    }
    for source in sources {
        if source.spread == Spread::None {
            warnings.push(Warning::new(
                Code::BiasWithoutUncertainty,
                format!("`{}` states a bias but not how well it is known", source.name),
            ));
        }
    }
    warnings
}
