//! What the program tells a user about their input: plain data, no rendering.
//!
//! A [`Diagnostic`] points into a file; a [`Warning`] is about a result. Both carry a [`Code`], the
//! one list of everything the program can complain of. Rendering for a terminal is in the command
//! line, JSON in the reports.

use std::ops::Range;

use serde::Serialize;

/// A range of bytes in a file.
pub type Span = Range<usize>;

/// How bad a finding is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Severity {
    /// The question cannot be answered until this is mended.
    Error,
    /// The answer stands, with a caveat.
    Warning,
}

macro_rules! codes {
    ($($(#[doc = $doc:literal])+ $variant:ident = $text:literal,)+) => {
        /// Every kind of finding, with the stable name that JSON and reports carry.
        #[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
        pub enum Code { $($(#[doc = $doc])+ $variant,)+ }

        impl Code {
            /// All codes, in the order of their list.
            pub const ALL: &'static [Code] = &[$(Code::$variant,)+];

            /// The stable name.
            pub fn as_str(self) -> &'static str {
                match self { $(Code::$variant => $text,)+ }
            }

            /// What the finding means, in a sentence.
            pub fn meaning(self) -> &'static str {
                match self { $(Code::$variant => concat!($($doc),+).trim_ascii(),)+ }
            }
        }
    };
}

codes! {
    // Reading the file.
    /// The file cannot be opened or read.
    CannotRead = "cannot_read",
    /// The file is larger than a station file can be.
    FileTooLarge = "file_too_large",
    /// The file is not UTF-8 text.
    NotText = "not_text",
    /// The file holds no station.
    EmptyFile = "empty_file",
    /// More is wrong with the file than is shown.
    TooManyFindings = "too_many_findings",
    /// The file breaks the rules of TOML.
    Syntax = "syntax",
    /// A key that the program does not know.
    UnknownKey = "unknown_key",
    /// A key that has to be there.
    MissingKey = "missing_key",
    /// A value of the wrong type: a list where a text is due, say.
    WrongType = "wrong_type",
    /// A value that is not one of the words allowed here.
    UnknownWord = "unknown_word",
    // Quantities.
    /// A number without the unit that its dimension needs.
    MissingUnit = "missing_unit",
    /// A unit that is not in the table of units.
    UnknownUnit = "unknown_unit",
    /// A unit of another dimension than the one that is due.
    WrongDimension = "wrong_dimension",
    /// A decimal comma.
    DecimalComma = "decimal_comma",
    /// A text that is no quantity.
    NotAQuantity = "not_a_quantity",
    /// A number that is not finite, or that no station can have.
    NumberOutOfRange = "number_out_of_range",
    /// A value that this quantity cannot have.
    OutsideDomain = "outside_domain",
    /// A range whose ends are in the wrong order.
    RangeReversed = "range_reversed",
    // Equations.
    /// An equation that cannot be read.
    EquationSyntax = "equation_syntax",
    /// A name in an equation that nothing defines.
    UnknownName = "unknown_name",
    /// A name defined twice.
    DuplicateName = "duplicate_name",
    /// Definitions that need each other.
    CircularDefinition = "circular_definition",
    /// Two sides of an equation that differ in dimension.
    DimensionMismatch = "dimension_mismatch",
    // Error sources.
    /// A source whose size is not stated.
    MissingSize = "missing_size",
    /// A source whose size is stated in more than one way.
    TwoSizes = "two_sizes",
    /// Limits without the shape of the distribution between them.
    MissingShape = "missing_shape",
    /// Keys of a source that do not go together.
    KeysDisagree = "keys_disagree",
    /// A source that acts on an input which the structure does not have.
    UnknownInput = "unknown_input",
    /// A source, or an automatic source, that does not exist.
    UnknownSource = "unknown_source",
    /// Correlation coefficients that no set of errors can have together.
    CorrelationNotPossible = "correlation_not_possible",
    // The question asked.
    /// An option of the command line that does not fit the station.
    BadQuestion = "bad_question",
    /// No solution of the equation exists for these values.
    NoSolution = "no_solution",
    // Warnings about a result.
    /// A limit of use of the structure is not kept.
    OutsideLimits = "outside_limits",
    /// An error source lasts only part of the year, and no month was named.
    SeasonalSource = "seasonal_source",
    /// A key that has no effect on this structure.
    UnusedKey = "unused_key",
    /// The value lies at a node of a published table, where the slope jumps.
    TableNode = "table_node",
    /// The value lies outside a published table, whose end value is held.
    TableEndHeld = "table_end_held",
    /// Correlated sources with finite degrees of freedom: no effective number can be given.
    DegreesOfFreedomUndefined = "degrees_of_freedom_undefined",
    /// Sources with a shape of their own drawn as normal because they are correlated.
    CorrelatedAsNormal = "correlated_as_normal",
    /// One or two rectangular sources outweigh all others: the coverage factor of the linear method is too large.
    RectangularDominates = "rectangular_dominates",
    /// The linear method does not agree with the Monte Carlo method.
    LinearNotAdequate = "linear_not_adequate",
    /// Trials in which no water passes the crest.
    TrialsWithoutFlow = "trials_without_flow",
    /// Trials in which a published table was left.
    TrialsOutsideTable = "trials_outside_table",
    /// Trials in which the equation has no value; they are left out.
    TrialsUndefined = "trials_undefined",
    /// The adaptive procedure was stopped before its figures had settled.
    NotSettled = "not_settled",
    /// A source replaces an automatic one but acts on another input.
    ReplacedElsewhere = "replaced_elsewhere",
    /// A known bias whose own uncertainty is not stated.
    BiasWithoutUncertainty = "bias_without_uncertainty",
    /// Moments that a distribution does not have.
    MomentsDoNotExist = "moments_do_not_exist",
    /// The result rests on numbers quoted from memory.
    FromMemory = "from_memory",
    /// No error source is stated for the head.
    NoHeadSource = "no_head_source",
    /// A coefficient of which no uncertainty is published, and no source of the file acts on it.
    NoCoefficientSource = "no_coefficient_source",
    /// A factor on a published coefficient without evidence.
    BareFactor = "bare_factor",
    /// The head asked about is not in the station's range.
    OutsideRange = "outside_range",
    /// The tailwater is above the modular limit and the structure has no equation for drowned flow.
    NotModular = "not_modular",
    /// The tailwater is above the modular limit: the equation for drowned flow is used.
    DrownedFlow = "drowned_flow",
    /// The flow at the control is not critical.
    NotCritical = "not_critical",
    /// The head is above the largest that the structure can take.
    AboveMaximum = "above_maximum",
    /// The head is read too near to the structure, or too far from it.
    GaugeMisplaced = "gauge_misplaced",
    /// Trials fall on another branch of the equation than the values asked about.
    TrialsAcrossBranch = "trials_across_branch",
    /// Another branch of the equation begins within three standard uncertainties.
    NearBranch = "near_branch",
}

/// A place in the file and what is to be said about it.
#[derive(Clone, Debug, PartialEq)]
pub struct Label {
    /// The bytes meant.
    pub span: Span,
    /// A few words, shown beside the place.
    pub text: String,
}

/// A repair that can be typed as it stands.
#[derive(Clone, Debug, PartialEq)]
pub struct Fix {
    /// The bytes to replace.
    pub span: Span,
    /// What to put there.
    pub replacement: String,
}

/// A finding about an input file.
#[derive(Clone, Debug, PartialEq)]
pub struct Diagnostic {
    /// Which finding.
    pub code: Code,
    /// How bad.
    pub severity: Severity,
    /// The thing and what is wrong with it, in one line.
    pub title: String,
    /// Where; the first is the place itself, the others are context.
    pub labels: Vec<Label>,
    /// How to mend it.
    pub help: Option<String>,
    /// The mend as a change of the file, where there is just one.
    pub fix: Option<Fix>,
}

impl Diagnostic {
    /// An error about a place in the file.
    pub fn error(code: Code, span: Span, title: impl Into<String>) -> Self {
        Self {
            code,
            severity: Severity::Error,
            title: title.into(),
            labels: vec![Label { span, text: String::new() }],
            help: None,
            fix: None,
        }
    }

    /// An error about the file as a whole.
    pub fn about_file(code: Code, title: impl Into<String>) -> Self {
        Self { labels: Vec::new(), ..Self::error(code, 0..0, title) }
    }

    /// A warning about a place in the file.
    pub fn warning(code: Code, span: Span, title: impl Into<String>) -> Self {
        Self { severity: Severity::Warning, ..Self::error(code, span, title) }
    }

    /// Words beside the marked place.
    #[must_use]
    pub fn label(mut self, text: impl Into<String>) -> Self {
        if let Some(first) = self.labels.first_mut() {
            first.text = text.into();
        }
        self
    }

    /// A second place that has to do with it.
    #[must_use]
    pub fn context(mut self, span: Span, text: impl Into<String>) -> Self {
        self.labels.push(Label { span, text: text.into() });
        self
    }

    /// How to mend it.
    #[must_use]
    pub fn help(mut self, text: impl Into<String>) -> Self {
        self.help = Some(text.into());
        self
    }

    /// The mend as a change of the file.
    #[must_use]
    pub fn fix(mut self, span: Span, replacement: impl Into<String>) -> Self {
        self.fix = Some(Fix { span, replacement: replacement.into() });
        self
    }
}

/// A caveat about a result.
#[derive(Clone, Debug, PartialEq)]
pub struct Warning {
    /// Which caveat.
    pub code: Code,
    /// The caveat in words, with its numbers.
    pub text: String,
}

impl Warning {
    /// A caveat.
    pub fn new(code: Code, text: impl Into<String>) -> Self {
        Self { code, text: text.into() }
    }
}

impl Serialize for Code {
    fn serialize<S: serde::Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.serialize_str(self.as_str())
    }
}

/// The nearest of some names to a mistyped one, if one is near enough to be meant.
///
/// Distance counts inserted, dropped, changed and swapped letters; a quarter of the letters may be wrong,
/// and one in any case. Capitals count least: `CFS` is `cfs`. A single letter is never taken for another.
pub fn nearest<'a>(name: &str, known: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    // Longer names cannot be a slip of a known one, and the cost grows with the length.
    if name.len() > 64 {
        return None;
    }
    let lower = name.to_lowercase();
    known
        .into_iter()
        .map(|candidate| {
            let distance = edit_distance(&lower, &candidate.to_lowercase());
            (2 * distance + usize::from(edit_distance(name, candidate) > distance), candidate)
        })
        .filter(|(distance, candidate)| {
            let letters = candidate.chars().count();
            let allowed =
                if letters < 2 || name.chars().count() < 2 { 0 } else { (letters / 4).max(1) };
            *distance <= 2 * allowed + 1
        })
        .min_by_key(|(distance, _)| *distance)
        .map(|(_, candidate)| candidate)
}

/// What a user wrote, cut to what a one-line message can hold.
pub fn shown(text: &str) -> String {
    const MOST: usize = 60;

    text.chars().take(MOST).collect()
}

/// A list of names for a message: thirty at the most.
pub fn listed<'a>(names: impl IntoIterator<Item = &'a str>) -> String {
    const MOST: usize = 30;

    let names: Vec<String> = names.into_iter().map(shown).collect();
    let shown = names.iter().take(MOST).cloned().collect::<Vec<_>>().join(", ");
    match names.len().saturating_sub(MOST) {
        0 => shown,
        more => format!("{shown} and {more} more"),
    }
}

/// Optimal string alignment distance.
fn edit_distance(a: &str, b: &str) -> usize {
    let (a, b): (Vec<char>, Vec<char>) = (a.chars().collect(), b.chars().collect());
    let mut rows = vec![vec![0; b.len() + 1]; a.len() + 1];
    for (i, row) in rows.iter_mut().enumerate() {
        row[0] = i;
    }
    rows[0] = (0..=b.len()).collect();
    for i in 1..=a.len() {
        for j in 1..=b.len() {
            let change = usize::from(a[i - 1] != b[j - 1]);
            let mut best =
                (rows[i - 1][j] + 1).min(rows[i][j - 1] + 1).min(rows[i - 1][j - 1] + change);
            if i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1] {
                best = best.min(rows[i - 2][j - 2] + 1);
            }
            rows[i][j] = best;
        }
    }
    rows[a.len()][b.len()]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_slip_finds_its_name_and_a_stranger_finds_none() {
        let known = ["crest_width", "crest_height", "approach_width"];
        assert_eq!(nearest("crest_widht", known), Some("crest_width"));
        assert_eq!(nearest("crest_hight", known), Some("crest_height"));
        assert_eq!(nearest("colour", known), None);
        assert_eq!(nearest("CFS", ["ft", "cfs"]), Some("cfs"));
        assert_eq!(nearest("C", ["b", "c"]), Some("c"));
        assert_eq!(nearest("C", ["b", "d"]), None);
        assert_eq!(nearest("crest_width", ["crest_height"]), None);
    }

    #[test]
    fn codes_have_distinct_names() {
        let mut names: Vec<_> = Code::ALL.iter().map(|code| code.as_str()).collect();
        names.sort_unstable();
        names.dedup();
        assert_eq!(names.len(), Code::ALL.len());
    }
}
