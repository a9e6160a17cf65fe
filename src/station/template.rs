//! A station file to start from, for each kind of structure.

use std::fmt::Write;

use crate::model::structures::{
    COEFFICIENT_FACTOR, GRAVITY, InputSpec, KINETIC_ENERGY_COEFFICIENT, Structure,
};

/// A commented station file for a structure of the catalogue; it reads without error as it stands.
pub fn template(structure: &Structure) -> String {
    let mut out = format!(
        "# {}\n# {}, {}\n#\n# Every number below is a placeholder: put your survey's in its place.\n\n\
         name = \"Unnamed station\"\n\n[structure]\nkind = \"{}\"\n",
        structure.title, structure.standard.document, structure.standard.title, structure.kind
    );
    for input in structure.inputs {
        // Writing to a String cannot fail, here and below.
        let _ = writeln!(out, "{}", input_line(input));
    }
    for input in [COEFFICIENT_FACTOR, GRAVITY] {
        let _ = writeln!(out, "{}", input_line(&input));
    }
    out.push_str(HEAD_AND_SOURCES);
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
    out.push_str(SUGGESTIONS);
    let _ = write!(
        out,
        "\n# The published uncertainty of the coefficient enters by itself as \"published coefficient\"\n\
         # ({}). After a calibration on site, say so:\n\
         # [[error_source]]\n# name = \"calibration by gaugings\"\n\
         # acts_on = \"coefficient_factor\"\n# expanded_uncertainty = \"1.5 %\"\n# coverage_factor = 2\n\
         # fixed_until = \"recalibration\"\n# replaces = \"published coefficient\"\n",
        structure.regimes[0].coefficient.words
    );
    out
}

/// A commented station file for an equation of the user's own.
pub fn equation_template() -> String {
    EQUATION.to_owned()
}

fn input_line(input: &InputSpec) -> String {
    let value = if input.dimension.is_none() {
        input.example.to_owned()
    } else {
        format!("\"{}\"", input.example)
    };
    let optional = input.default.is_some_and(|default| !default.is_nan())
        || input.key == KINETIC_ENERGY_COEFFICIENT.key;
    let mark = if optional { "# " } else { "" };
    format!("{mark}{} = {value}    # {}", input.key, input.meaning)
}

const HEAD_AND_SOURCES: &str = r#"
[head]
range = ["0.06 m", "0.30 m"]
# zero_above_crest = "-2 mm"    # surveyed zero of the gauge; a zero below the crest reads high

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
# Others to think of; take away the # and put in your figures.
# [[error_source]]
# name = "growth on the crest"    # a bias of known sign: the water stands higher
# acts_on = "head"
# error_from = "0 mm"
# error_to = "2 mm"
# correlation_time = "4 days"
#
# [[error_source]]
# name = "residual waves"
# acts_on = "head"
# standard_uncertainty = "2 mm"
# fixed_until = "reading"
#
# [[error_source]]
# name = "air temperature at an ultrasonic sensor"    # 0.17 % of the air gap for each kelvin
# acts_on = "head"
# half_width = "2 mm"
# shape = "arcsine"
# fixed_until = "survey"
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
