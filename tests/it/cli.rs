//! The binary as users run it: arguments, exit statuses, formats, what goes where.

use std::process::{Command, Output};

fn nappe(arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_nappe")).args(arguments).output().unwrap()
}

fn stdout(output: &Output) -> String {
    String::from_utf8(output.stdout.clone()).unwrap()
}

fn stderr(output: &Output) -> String {
    String::from_utf8(output.stderr.clone()).unwrap()
}

const NOTCH: &str = "tests/data/budgets/notch.toml";
const FLUME: &str = "tests/data/budgets/flume.toml";

fn budget_json(arguments: &[&str]) -> serde_json::Value {
    let output = nappe(&[&["budget"], arguments, &["--format", "json"]].concat());
    assert_eq!(output.status.code(), Some(0), "{}", stderr(&output));
    assert_eq!(stderr(&output), "");
    serde_json::from_str(&stdout(&output)).unwrap()
}

#[test]
fn a_budget_answers_with_everything_needed_to_retrace_it() {
    let output = nappe(&["budget", NOTCH, "--head", "0.1 m"]);
    assert_eq!(output.status.code(), Some(0));
    assert_eq!(stderr(&output), "");
    let page = stdout(&output);
    for needed in [
        "Quillmere works",
        "Indicated head 0.1 m, corrected 0.099 m",
        "corrected discharge",
        "4.28 l/s",
        "it reads high by 2.52 %",
        "air",
        "half-width",
        "3.4",
        "not adequate",
        "seed 1",
        "sha256",
        "ISO 1438:2017",
        "from memory",
        "never replace",
        "8/15*",
    ] {
        assert!(page.contains(needed), "{needed} is missing:\n{page}");
    }
}

#[test]
fn json_has_the_published_keys() {
    let value = budget_json(&[NOTCH, "--head", "0.1 m", "--trials", "10000"]);
    for key in [
        "station",
        "structure",
        "nappe_version",
        "station_digest",
        "at",
        "result",
        "linear",
        "monte_carlo",
        "agreement",
        "sources",
        "warnings",
    ] {
        assert!(value.get(key).is_some(), "{key}");
    }
    assert_eq!(value["at"]["head_m"], 0.1);
    assert_eq!(value["result"]["unit"], "m3/s");
    assert_eq!(value["result"]["name"], "discharge");
    assert_eq!(value["linear"]["degrees_of_freedom_state"], "infinite");
    assert!(value["linear"]["effective_degrees_of_freedom"].is_null());
    assert_eq!(value["monte_carlo"]["trials"], 10_000);
    assert!(value["agreement"]["linear_is_adequate"].is_boolean());
    let first = &value["sources"][0];
    for key in [
        "rank",
        "name",
        "acts_on",
        "fixed_until",
        "standard_uncertainty",
        "unit",
        "sensitivity",
        "contribution",
        "share_linear",
        "share_first_order",
        "share_total",
    ] {
        assert!(first.get(key).is_some(), "{key}");
    }
    assert!(value["station_digest"].as_str().unwrap().starts_with("sha256:"));
}

#[test]
fn without_trials_monte_carlo_is_null() {
    let value = budget_json(&[NOTCH, "--head", "0.1 m", "--trials", "0"]);
    assert!(value["monte_carlo"].is_null() && value["agreement"].is_null());
    assert!(value["sources"][0]["share_total"].is_null());
}

#[test]
fn a_flow_finds_its_head() {
    let value = budget_json(&[NOTCH, "--flow", "10 l/s", "--trials", "0"]);
    let flow = value["result"]["value"].as_f64().unwrap();
    assert!((flow / 0.01 - 1.0).abs() < 1e-12);
    let head = value["at"]["head_m"].as_f64().unwrap();
    let back = budget_json(&[NOTCH, "--head", &format!("{head} m"), "--trials", "0"]);
    assert_eq!(back["result"]["value"], value["result"]["value"]);
}

#[test]
fn without_a_head_the_middle_of_the_range_is_taken() {
    let value = budget_json(&[NOTCH, "--trials", "0"]);
    assert!((value["at"]["head_m"].as_f64().unwrap() - 0.18).abs() < 1e-12);
}

#[test]
fn coverage_is_asked_for_as_probability_or_factor() {
    let of = |arguments: &[&str]| {
        budget_json(&[&[FLUME, "--trials", "0"], arguments].concat())["linear"].clone()
    };
    let by_factor = of(&["--coverage-factor", "2"]);
    assert_eq!(by_factor["coverage_factor"], 2.0);
    assert!((by_factor["coverage"].as_f64().unwrap() - 0.9545).abs() < 1e-4);
    let by_probability = of(&["--coverage", "99 %"]);
    assert!((by_probability["coverage_factor"].as_f64().unwrap() - 2.5758).abs() < 1e-4);
}

#[test]
fn units_of_the_page_can_be_us_customary() {
    let page = stdout(&nappe(&["budget", FLUME, "--units", "us", "--trials", "0"]));
    // What is there to retrace a number stays in SI units.
    let (results, _) = page.split_once("To retrace").unwrap();
    assert!(results.contains("cfs") && results.contains(" ft") && !results.contains("m3/s"));
}

#[test]
fn csv_and_markdown_have_a_row_for_each_source() {
    let csv = stdout(&nappe(&["budget", NOTCH, "--format", "csv", "--trials", "0"]));
    assert!(csv.starts_with("rank,source,"));
    assert_eq!(csv.lines().count(), 1 + 9 + 4);
    assert!(csv.contains("\"half-width 3.4 mm, rectangular\""));
    let markdown = stdout(&nappe(&["budget", NOTCH, "--format", "markdown", "--trials", "0"]));
    assert!(markdown.starts_with("# Quillmere works"));
    assert!(markdown.contains("| air temperature |"));
}

#[test]
fn output_that_is_no_terminal_has_no_colour() {
    assert!(!stdout(&nappe(&["budget", NOTCH, "--trials", "0"])).contains('\u{1b}'));
    assert!(!stderr(&nappe(&["budget", "no-such-file.toml"])).contains('\u{1b}'));
}

#[test]
fn bad_questions_are_refused_with_status_2() {
    for arguments in [
        &["budget"][..],
        &["budget", NOTCH, "--head", "0.1"],
        &["budget", NOTCH, "--head", "0,1 m"],
        &["budget", NOTCH, "--head", "1 s"],
        &["budget", NOTCH, "--head", "0.1 m", "--flow", "1 l/s"],
        &["budget", NOTCH, "--flow", "-1 l/s"],
        &["budget", NOTCH, "--trials", "many"],
        &["budget", NOTCH, "--trials", "1e12"],
        &["budget", NOTCH, "--coverage", "150 %"],
        &["budget", NOTCH, "--coverage", "95 %", "--coverage-factor", "2"],
        &["budget", NOTCH, "--threads", "0"],
        &["budget", NOTCH, "--month", "13"],
        &["budget", NOTCH, "--format", "xml"],
        &["budget", "no-such-file.toml"],
        &["structures", "thin-plate-triangle"],
        &["structures", "thin-plate-triangular", "--format", "csv"],
        &["new", "weir"],
        &["pour"],
    ] {
        let output = nappe(arguments);
        assert_eq!(output.status.code(), Some(2), "{arguments:?}");
        assert!(output.stdout.is_empty(), "{arguments:?}");
        assert!(stderr(&output).contains("error"), "{arguments:?}: {}", stderr(&output));
    }
    let near = stderr(&nappe(&["structures", "thin-plate-triangle"]));
    assert!(near.contains("thin-plate-triangular"), "{near}");
}

#[test]
fn what_cannot_be_stated_has_status_3() {
    for arguments in [
        &["budget", NOTCH, "--head", "-0.05 m"][..],
        &["budget", NOTCH, "--head", "0 mm"],
        &["budget", NOTCH, "--flow", "9000 m3/s"],
    ] {
        let output = nappe(arguments);
        assert_eq!(output.status.code(), Some(3), "{arguments:?}");
        assert!(stderr(&output).contains("cannot be stated"), "{}", stderr(&output));
    }
}

#[test]
fn heads_near_the_crest_are_counted_and_reported() {
    let value = budget_json(&[NOTCH, "--head", "4 mm", "--trials", "100000"]);
    assert!(value["monte_carlo"]["trials_without_flow"].as_u64().unwrap() > 1000);
    let codes: Vec<&str> = value["warnings"]
        .as_array()
        .unwrap()
        .iter()
        .map(|warning| warning["code"].as_str().unwrap())
        .collect();
    assert!(codes.contains(&"trials_without_flow") && codes.contains(&"outside_limits"));
    assert!(value["monte_carlo"]["mean"].as_f64().unwrap().is_finite());
}

#[test]
fn a_new_file_is_written_once_and_whole() {
    let folder = std::env::temp_dir().join(format!("nappe-new-{}", std::process::id()));
    std::fs::create_dir_all(&folder).unwrap();
    let file = folder.join("station.toml");
    let name = file.to_str().unwrap();
    let output = nappe(&["new", "triangular-profile", "-o", name]);
    assert_eq!(output.status.code(), Some(0), "{}", stderr(&output));
    assert_eq!(nappe(&["check", name]).status.code(), Some(0));
    let before = std::fs::read(&file).unwrap();
    let again = nappe(&["new", "equation", "-o", name]);
    assert_eq!(again.status.code(), Some(2));
    assert!(stderr(&again).contains("exists already"));
    assert_eq!(std::fs::read(&file).unwrap(), before);
    assert_eq!(std::fs::read_dir(&folder).unwrap().count(), 1, "nothing is left beside it");
    std::fs::remove_dir_all(&folder).unwrap();
    let nowhere = nappe(&["new", "equation", "-o", "/no/such/folder/x.toml"]);
    assert_eq!(nowhere.status.code(), Some(2));
}

#[test]
fn a_structure_shows_equation_derivatives_limits_and_sources() {
    let page = stdout(&nappe(&["structures", "thin-plate-triangular"]));
    for needed in [
        "Q = 8/15*F_C*C_e*sqrt(2*g)*tan(theta/2)*h_e^2.5",
        "dQ/dh = 4/3*F_C*C_e*sqrt(2*g)*tan(theta/2)*h_e^1.5",
        "h/p <= 0.4",
        "1.0 % at 95 %",
        "ISO 1438:2017",
        "from memory",
        "NBS SP 421",
        "0.5785",
    ] {
        assert!(page.contains(needed), "{needed}\n{page}");
    }
    let list = stdout(&nappe(&["structures"]));
    for kind in ["thin-plate-rectangular", "rectangular-throated-flume", "equation"] {
        assert!(list.contains(kind));
    }
}

#[test]
fn help_completions_and_manual_are_there() {
    let help = stdout(&nappe(&["--help"]));
    assert!(help.contains("never replace") && help.contains("Exit status"));
    for shell in ["bash", "zsh", "fish", "powershell"] {
        assert!(stdout(&nappe(&["completions", shell])).contains("nappe"));
    }
    let manual = stdout(&nappe(&["manual"]));
    assert!(manual.contains(".TH") && manual.contains("budget"));
}

#[test]
fn a_byte_order_mark_and_windows_line_ends_are_accepted() {
    let folder = std::env::temp_dir().join(format!("nappe-bom-{}", std::process::id()));
    std::fs::create_dir_all(&folder).unwrap();
    let file = folder.join("station.toml");
    let text = std::fs::read_to_string(NOTCH).unwrap().replace('\n', "\r\n");
    std::fs::write(&file, format!("\u{feff}{text}")).unwrap();
    let output = nappe(&["check", file.to_str().unwrap()]);
    assert_eq!(output.status.code(), Some(0), "{}", stderr(&output));
    std::fs::remove_dir_all(&folder).unwrap();
}

#[test]
fn reading_changes_no_file() {
    let before = std::fs::read(NOTCH).unwrap();
    nappe(&["budget", NOTCH, "--trials", "0"]);
    nappe(&["check", NOTCH]);
    assert_eq!(std::fs::read(NOTCH).unwrap(), before);
}

#[test]
fn a_replacement_that_acts_elsewhere_is_warned_of() {
    let text = std::fs::read_to_string(NOTCH).unwrap();
    let with = |acts_on: &str| {
        let source = format!(
            "\n[[error_source]]\nname = \"calibration\"\nacts_on = \"{acts_on}\"\n\
             standard_uncertainty = \"1 %\"\nreplaces = \"published coefficient\"\n"
        );
        let (station, findings) =
            nappe::station::read([&text, source.as_str()].concat().as_bytes());
        assert!(findings.is_empty(), "{findings:?}");
        station.unwrap().warnings.iter().any(|each| each.code.as_str() == "replaced_elsewhere")
    };
    assert!(with("head"));
    assert!(!with("coefficient_factor"));
}
