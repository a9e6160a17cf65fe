//! Every station in `examples/` and every file that `nappe new` writes: read, checked, answered.

use std::path::PathBuf;

use nappe::model::structures::CATALOGUE;
use nappe::propagation::Coverage;
use nappe::propagation::monte_carlo::Amount;
use nappe::report::{UnitSystem, budget_document, text};
use nappe::station::{Station, equation_template, read, template};
use nappe::study::{At, Question, budget};

fn answer(station: &Station) -> String {
    let question = Question {
        at: At::Middle,
        coverage: Coverage::Probability(0.95),
        trials: Some(Amount::Fixed(20_000)),
        seed: 1,
        tailwater: None,
        month: Some(7),
    };
    let found = budget(station, &question, &|_| {}).expect("an example has an answer");
    assert!(found.linear.standard_uncertainty > 0.0);
    text(&budget_document(&found, UnitSystem::Si), 120)
}

fn examples() -> Vec<PathBuf> {
    let mut files: Vec<PathBuf> = std::fs::read_dir("examples")
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|extension| extension == "toml"))
        .collect();
    files.sort();
    files
}

#[test]
fn every_example_has_an_answer_and_a_story() {
    let examples = examples();
    assert!(examples.len() >= 3);
    for file in examples {
        let content = std::fs::read(&file).unwrap();
        let (station, findings) = read(&content);
        assert!(findings.is_empty(), "{}: {findings:?}", file.display());
        let page = answer(&station.unwrap());
        assert!(page.contains("Sources of uncertainty, ranked"));
        let comments =
            content.split(|byte| *byte == b'\n').take_while(|line| line.starts_with(b"#"));
        assert!(comments.count() >= 5, "{} tells no story", file.display());
    }
}

#[test]
fn every_new_file_reads_and_answers_as_it_stands() {
    let mut files: Vec<(String, String)> = CATALOGUE
        .iter()
        .map(|structure| (structure.kind.to_owned(), template(structure)))
        .collect();
    files.push(("equation".to_owned(), equation_template()));
    for (kind, file) in files {
        let (station, findings) = read(file.as_bytes());
        assert!(findings.is_empty(), "{kind}: {findings:#?}\n{file}");
        answer(&station.unwrap());
    }
}

/// What is suggested in comments is no less right than what stands.
#[test]
fn the_suggestions_of_a_new_file_read_as_well() {
    for structure in CATALOGUE {
        let suggested: String = template(structure)
            .lines()
            .map(|line| match line.strip_prefix("# ") {
                Some(rest) if is_key(rest) || rest.starts_with('[') => format!("{rest}\n"),
                _ => format!("{line}\n"),
            })
            .collect();
        let (station, findings) = read(suggested.as_bytes());
        assert!(findings.is_empty(), "{}: {findings:#?}\n{suggested}", structure.kind);
        answer(&station.unwrap());
    }
}

/// A line `key = value`, not words that hold an equals sign.
fn is_key(line: &str) -> bool {
    line.split_once(" = ").is_some_and(|(key, _)| {
        key.chars().all(|letter| letter.is_ascii_lowercase() || letter == '_')
    })
}
