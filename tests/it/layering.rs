//! The direction of imports, and which crate is used where: each module may import only what stands below
//! it.

use std::path::{Path, PathBuf};

/// From the bottom up: `units` and `diagnostic` are one layer with nothing below.
const LAYERS: [&[&str]; 7] = [
    &["units", "diagnostic"],
    &["model"],
    &["propagation"],
    &["station"],
    &["study"],
    &["report"],
    &["cli"],
];

/// Crates that belong to one place.
const CRATES: [(&str, &[&str]); 14] = [
    ("clap::", &["src/cli/"]),
    ("clap_complete::", &["src/cli/"]),
    ("clap_mangen::", &["src/cli/generate.rs"]),
    ("comfy_table::", &["src/report/text.rs"]),
    ("annotate_snippets::", &["src/cli/diagnostics.rs"]),
    ("anstream::", &["src/cli/"]),
    ("indicatif::", &["src/cli/"]),
    ("toml::", &["src/station/"]),
    ("rand::", &["src/propagation/monte_carlo/"]),
    ("rand_distr::", &["src/propagation/monte_carlo/"]),
    ("statrs::", &["src/propagation/coverage.rs"]),
    ("sha2::", &["src/station/file.rs"]),
    ("schemars::", &["src/report/"]),
    ("rayon::", &["src/propagation/", "src/cli/budget.rs"]),
];

fn sources(folder: &Path) -> Vec<PathBuf> {
    let mut files = Vec::new();
    for entry in std::fs::read_dir(folder).unwrap() {
        let path = entry.unwrap().path();
        if path.is_dir() {
            files.extend(sources(&path));
        } else if path.extension().is_some_and(|extension| extension == "rs") {
            files.push(path);
        }
    }
    files
}

fn layer_of(module: &str) -> Option<usize> {
    LAYERS.iter().position(|layer| layer.contains(&module))
}

/// Imports of a file that point up, as `module -> imported`.
fn wrong_imports(module: &str, text: &str) -> Vec<String> {
    let own = layer_of(module).expect("every module has a layer");
    text.lines()
        .filter(|line| !line.trim_start().starts_with("//"))
        .flat_map(|line| line.match_indices("crate::").map(|(at, _)| &line[at + 7..]))
        .filter_map(|rest| {
            let name: String =
                rest.chars().take_while(|c| c.is_ascii_lowercase() || *c == '_').collect();
            let imported = layer_of(&name)?;
            (imported > own || (imported == own && name != module))
                .then(|| format!("{module} -> {name}"))
        })
        .collect()
}

#[test]
fn imports_point_one_way() {
    for file in sources(Path::new("src")) {
        let inside = file.strip_prefix("src").unwrap();
        let first = inside.components().next().unwrap().as_os_str().to_string_lossy().into_owned();
        let module = first.trim_end_matches(".rs");
        if module == "lib" || module == "main" {
            continue;
        }
        let text = std::fs::read_to_string(&file).unwrap();
        let wrong = wrong_imports(module, &text);
        // The nearest name to a mistyped one is plain data of the diagnostics' layer.
        let wrong: Vec<_> = wrong.into_iter().filter(|w| w != "units -> diagnostic").collect();
        assert!(wrong.is_empty(), "{}: {wrong:?}", file.display());
    }
}

#[test]
fn a_planted_import_is_caught() {
    assert_eq!(wrong_imports("model", "use crate::propagation::Source;"), ["model -> propagation"]);
    assert_eq!(wrong_imports("report", "    crate::cli::run();"), ["report -> cli"]);
    assert!(wrong_imports("cli", "use crate::report;").is_empty());
}

#[test]
fn each_crate_is_used_in_its_place() {
    for file in sources(Path::new("src")) {
        let name = file.to_string_lossy().replace('\\', "/");
        let text = std::fs::read_to_string(&file).unwrap();
        for (used, places) in CRATES {
            let uses = text.lines().any(|line| {
                let line = line.trim_start();
                let used = line.match_indices(used).any(|(at, _)| {
                    // `clap::` also ends no other crate's name.
                    !line[..at].ends_with(|c: char| c.is_alphanumeric() || c == '_' || c == ':')
                });
                !line.starts_with("//") && used
            });
            let allowed = places.iter().any(|place| name.starts_with(place));
            assert!(!uses || allowed, "{name} uses {used}");
        }
    }
}

#[test]
fn nothing_below_the_command_line_prints_or_asks_the_machine() {
    for file in sources(Path::new("src")) {
        if file.starts_with("src/cli") || file.ends_with("main.rs") {
            continue;
        }
        let text = std::fs::read_to_string(&file).unwrap();
        for forbidden in
            ["println!", "eprintln!", "std::env::", "std::fs::", "SystemTime", "Instant"]
        {
            let found = text
                .lines()
                .any(|line| !line.trim_start().starts_with("//") && line.contains(forbidden));
            assert!(!found, "{}: {forbidden}", file.display());
        }
    }
}
