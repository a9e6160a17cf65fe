//! A station file to start from, for each kind of structure.

use std::fmt::Write;

use crate::model::structures::{
    COEFFICIENT_FACTOR, COMPOUND, Choice, Coefficient, GRAVITY, HEAD, InputSpec, Structure,
};

/// A commented station file for a structure of the catalogue; it reads without error as it stands, and so
/// does every suggestion in it once its `#` is taken away.
pub fn template(structure: &Structure) -> String {
    let mut out = format!(
        "# {}\n# {}, {}\n#\n# Every number below is a placeholder: put your survey's in its place.\n\n\
         name = \"Unnamed station\"\n\n[structure]\nkind = \"{}\"\n",
        structure.title, structure.standard.document, structure.standard.title, structure.kind
    );
    if let Some(choice) = &structure.choice {
        out.push_str(&choice_lines(choice));
    }
    for input in structure.inputs {
        // Writing to a String cannot fail, here and below.
        let _ = writeln!(out, "{}", input_line(input));
    }
    let is_compound = structure.kind == COMPOUND;
    for input in [COEFFICIENT_FACTOR, GRAVITY] {
        // Each section of a compound weir has its own factor.
        if !(is_compound && input == COEFFICIENT_FACTOR) {
            let _ = writeln!(out, "{}", input_line(&input));
        }
    }
    if is_compound {
        out.push_str(SECTIONS);
    }
    out.push_str(&head(structure));
    out.push_str(SOURCES);
    let width = structure.inputs.iter().find(|input| input.key.ends_with("width"));
    if let Some(width) = width {
        let _ = write!(
            out,
            "\n[[error_source]]\nname = \"{} by tape\"\nacts_on = \"{}\"\nhalf_width = \"3 mm\"\n\
             shape = \"rectangular\"\nfixed_until = \"survey\"\n",
            width.key.replace('_', " "),
            width.key
        );
    }
    out.push_str(&coefficient(structure));
    out.push_str(&tailwater(structure));
    out.push_str(SUGGESTIONS);
    out
}

/// A commented station file for an equation of the user's own.
pub fn equation_template() -> String {
    EQUATION.to_owned()
}

fn choice_lines(choice: &Choice) -> String {
    let words: Vec<&str> = choice.sets.iter().map(|(word, _)| *word).collect();
    let mut lines = String::new();
    for chunk in words.chunks(12) {
        let _ = writeln!(lines, "# {}: {}", choice.key, chunk.join(", "));
    }
    let _ = writeln!(lines, "{} = \"{}\"", choice.key, choice.example);
    lines
}

fn input_line(input: &InputSpec) -> String {
    let value = if input.dimension.is_none() {
        input.example.to_owned()
    } else {
        format!("\"{}\"", input.example)
    };
    let mark = if input.default_value().is_some() { "# " } else { "" };
    format!("{mark}{} = {value}    # {}", input.key, input.meaning)
}

fn head(structure: &Structure) -> String {
    let example = HEAD.example;
    format!(
        "\n[head]\nrange = [\"0.06 m\", \"0.30 m\"]    # from the lowest to the highest head that counts\n\
         # maximum = \"0.40 m\"    # the top of the plate, or the freeboard\n\
         # gauge_distance = \"2.0 m\"    # {}\n\
         # zero_above_crest = \"-2 mm\"    # surveyed zero of the gauge; a zero below the crest reads high; \
         ask for one head with --head \"{example}\"\n",
        structure.head_measured.words
    )
}

/// How the uncertainty of the coefficient enters.
fn coefficient(structure: &Structure) -> String {
    match structure.regimes[0].coefficient {
        Coefficient::Published(rule) => format!(
            "\n# The published uncertainty of the coefficient enters by itself as \"published coefficient\"\n\
             # ({}). After a calibration on site, say so:\n\
             # [[error_source]]\n# name = \"calibration by gaugings\"\n\
             # acts_on = \"coefficient_factor\"\n# expanded_uncertainty = \"1.5 %\"\n\
             # coverage_factor = 2\n# fixed_until = \"recalibration\"\n\
             # replaces = \"published coefficient\"\n",
            rule.words
        ),
        Coefficient::FromUser { .. } if structure.kind == COMPOUND => "\n# The published uncertainty of each section's coefficient enters by itself; like sections share\n\
             # theirs.\n"
            .to_owned(),
        Coefficient::FromUser { inputs, why } => {
            let acts_on = inputs.first().copied().unwrap_or_default();
            format!(
                "\n# {why}.\n[[error_source]]\nname = \"coefficient\"\nacts_on = \"{acts_on}\"\n\
                 expanded_uncertainty = \"4 %\"\ncoverage_factor = 2\nfixed_until = \"rebuilding\"\n"
            )
        }
    }
}

/// The tailwater as a suggestion.
fn tailwater(structure: &Structure) -> String {
    if structure.kind == COMPOUND {
        return COMPOUND_TAILWATER.to_owned();
    }
    let names: Vec<&str> = structure.drowned.iter().map(|drowned| drowned.name).collect();
    let mut out = format!(
        "\n# The level below the structure, if it is known: {}.\n# [tailwater]\n\
         # level = \"-0.20 m\"    # above the crest; or table = [[\"0 l/s\", \"-300 mm\"], [\"90 l/s\", \"-60 mm\"]]\n",
        structure.modular.words
    );
    if let Some((first, others)) = names.split_first() {
        let others: Vec<&str> = others.iter().copied().chain(["none"]).collect();
        let _ = writeln!(out, "# drowned_flow = \"{first}\"    # or: {}", others.join(", "));
    }
    if structure.modular.is_ratio() {
        let ratio = structure.modular.ratio.unwrap_or(0.7);
        let _ = writeln!(out, "# modular_limit = {ratio}    # in place of the published one");
    }
    out.push_str(
        "#\n# [[error_source]]\n# name = \"tailwater gauge\"\n# acts_on = \"tailwater_head\"\n\
         # standard_uncertainty = \"5 mm\"\n# fixed_until = \"survey\"\n",
    );
    if structure.drowned.iter().any(|drowned| drowned.uncertainty.is_none()) {
        out.push_str(
            "#\n# [[error_source]]\n# name = \"drowned-flow equation\"\n# acts_on = \"drowned_flow_factor\"\n\
             # expanded_uncertainty = \"10 %\"\n# coverage_factor = 2\n# fixed_until = \"rebuilding\"\n",
        );
    }
    out
}

const SECTIONS: &str = r#"
# The sections, each a structure of its own kind with the level of its crest above the lowest one.
[[structure.section]]
kind = "triangular-profile"
crest_level = "0 m"
crest_width = "1.00 m"

[[structure.section]]
kind = "triangular-profile"
crest_level = "0.15 m"
crest_width = "2.00 m"
# coefficient_factor = 1    # of this section; error sources act on "section 2 coefficient_factor"
"#;

const COMPOUND_TAILWATER: &str = r#"
# The level below the structure, if it is known; drowned_flow and modular_limit stand in each section.
# [tailwater]
# level = "-0.20 m"    # above the lowest crest; or table = [["0 l/s", "-300 mm"], ["90 l/s", "-60 mm"]]
#
# [[error_source]]
# name = "tailwater gauge"
# acts_on = "tailwater_head"
# standard_uncertainty = "5 mm"
# fixed_until = "survey"
#
# [[error_source]]
# name = "drowned-flow equation"
# acts_on = ["section 1 drowned_flow_factor", "section 2 drowned_flow_factor"]
# expanded_uncertainty = "10 %"
# coverage_factor = 2
# fixed_until = "rebuilding"
"#;

const SOURCES: &str = r#"
# What can make the head wrong. Each source states its size in exactly one way, and when a new draw
# of its error is made: fixed_until = "rebuilding", "recalibration", "survey", "visit", "cleaning" or
# "reading"; or correlation_time.

[[error_source]]
name = "gauge zero transfer"
acts_on = "head"
standard_uncertainty = "1.5 mm"
fixed_until = "survey"
# evidence = "level run, sheet 3"
# dated = "2024-01-31"

[[error_source]]
name = "sensor, maker's limits"
acts_on = "head"
half_width = "2 mm"    # mind: per cent of what? "0.1 % of 2 m" is allowed
shape = "rectangular"
fixed_until = "recalibration"

[[error_source]]
name = "zero set at visits"
acts_on = "head"
half_width = "1.5 mm"
shape = "rectangular"
fixed_until = "visit"

[[error_source]]
name = "resolution of the logger"
acts_on = "head"
resolution = "1 mm"
fixed_until = "reading"
"#;

const SUGGESTIONS: &str = r#"
# Others to think of, with sizes that are usual in the trade (common practice); take away the # from
# those that your station has, and put in your figures.
#
# Datum
# [[error_source]]
# name = "level run from benchmark to crest"    # closure 0.9 mm for each root of set-ups, 4.6 mm at most
# acts_on = "head"
# standard_uncertainty = "1 mm"
# fixed_until = "survey"
#
# [[error_source]]
# name = "crest not level"    # levels at several points of the crest against their mean
# acts_on = "head"
# observations = ["-1.5 mm", "0.5 mm", "2.0 mm", "-1.0 mm"]
# fixed_until = "survey"
#
# [[error_source]]
# name = "settlement since the last survey"
# acts_on = "head"
# half_width = "1 mm"
# shape = "rectangular"
# fixed_until = "survey"
#
# Reading and instruments
# [[error_source]]
# name = "staff gauge, 2 mm marks, at the visit"    # 3 mm to 5 mm with 10 mm marks, 10 mm in waves
# acts_on = "head"
# half_width = "2 mm"
# shape = "triangular"
# fixed_until = "visit"
#
# [[error_source]]
# name = "pressure sensor, linearity and hysteresis"    # per cent of full scale, not of the reading
# acts_on = "head"
# half_width = "0.1 % of 2 m"
# shape = "rectangular"
# fixed_until = "recalibration"
#
# [[error_source]]
# name = "pressure sensor, drift of its zero"
# acts_on = "head"
# half_width = "0.1 % of 2 m"
# shape = "rectangular"
# correlation_time = "20 days"
#
# [[error_source]]
# name = "air pressure, blocked vent or remote barometer"    # 10.2 mm for each hPa
# acts_on = "head"
# standard_uncertainty = "3 mm"
# correlation_time = "2 days"
#
# [[error_source]]
# name = "air temperature at an ultrasonic sensor"    # 0.17 % of the air gap for each kelvin
# acts_on = "head"
# half_width = "0.5 % of 0.6 m"
# shape = "arcsine"
# fixed_until = "survey"
#
# [[error_source]]
# name = "float, friction of the pulley"    # rising reads low, falling high: one of two values
# acts_on = "head"
# half_width = "0.6 mm"
# shape = "arcsine"
# correlation_time = "12 hours"
#
# [[error_source]]
# name = "current loop and converter"    # per cent of full scale
# acts_on = "head"
# half_width = "0.1 % of 1 m"
# shape = "rectangular"
# fixed_until = "recalibration"
#
# Hydraulics between channel and sensor
# [[error_source]]
# name = "residual waves"
# acts_on = "head"
# standard_uncertainty = "2 mm"
# fixed_until = "reading"
#
# [[error_source]]
# name = "drawdown at the intake"    # a share of the velocity head: 12.7 mm at 0.5 m/s
# acts_on = "head"
# half_width = "1 mm"
# shape = "rectangular"
# fixed_until = "rebuilding"
#
# [[error_source]]
# name = "density in the well against the channel"    # 1.8 mm for each metre between 5 and 20 degrees
# acts_on = "head"
# half_width = "1 mm"
# shape = "rectangular"
# correlation_time = "30 days"
#
# Condition of the structure
# [[error_source]]
# name = "growth on the crest"    # a bias of known sign: the water stands higher
# acts_on = "head"
# error_from = "0 mm"
# error_to = "2 mm"
# correlation_time = "4 days"
#
# [[error_source]]
# name = "rag or branch on the crest"    # there for a small share of the time
# acts_on = "head"
# error_from = "10 mm"
# error_to = "40 mm"
# present = "1 %"
# correlation_time = "1 day"
"#;

const EQUATION: &str = r#"# An equation of your own, of any dimension
#
# Every number below is a placeholder: put your own in its place.

name = "Unnamed station"

[structure]
kind = "equation"
result = "discharge"
unit = "m3/s"

# In any order. Signs + - * / ^ and brackets; sqrt, exp, ln, sin, cos, tan, arcsin, arccos, arctan,
# abs, min, max; a choice is: a when h < p otherwise b. g is gravity, pi the circle's ratio.
[structure.definitions]
discharge = "c * b * he^1.5"
he = "h + k"

# Every other name of the definitions, with its unit; one of them may be the head.
[structure.inputs]
c = "1.84 m^0.5/s"
b = "1.2 m"
k = "1 mm"
h = "head"

# A quantity that is given only by an equation it must satisfy: the root nearest above `from`.
# [structure.unknown]
# name = "total_head"
# equation = "total_head = h + discharge^2 / (2 * g * area^2)"
# from = "h"
# to = "1.5 * h"

[head]
range = ["0.10 m", "0.40 m"]

[[error_source]]
name = "gauge zero transfer"
acts_on = "head"
standard_uncertainty = "1.5 mm"
fixed_until = "survey"

[[error_source]]
name = "coefficient, from a rating"
acts_on = "c"
expanded_uncertainty = "3 %"
coverage_factor = 2
fixed_until = "recalibration"
"#;
