//! Committed documents that must keep up with the program: the schema, the lists of codes, units and
//! sources, and the README's promises.

use nappe::diagnostic::Code;
use nappe::model::source::BIBLIOGRAPHY;
use nappe::model::structures::CATALOGUE;

fn document(name: &str) -> String {
    std::fs::read_to_string(name).unwrap_or_else(|error| panic!("{name}: {error}"))
}

#[test]
fn the_schema_is_current() {
    let committed = document("docs/schema/budget.json");
    assert_eq!(
        committed,
        nappe::report::budget_schema(),
        "refresh it: nappe schema > docs/schema/budget.json"
    );
}

#[test]
fn every_code_has_a_row_in_the_list() {
    let list = document("docs/diagnostics.md");
    for code in Code::ALL {
        assert!(list.contains(&format!("`{}`", code.as_str())), "{} is missing", code.as_str());
    }
}

#[test]
fn every_source_is_in_the_bibliography_and_every_structure_in_the_guide() {
    let sources = document("docs/sources.md");
    for citation in BIBLIOGRAPHY {
        assert!(sources.contains(citation.document), "{} is missing", citation.document);
    }
    let guide = document("docs/station-file.md");
    for structure in CATALOGUE {
        assert!(guide.contains(structure.kind), "{} is missing", structure.kind);
        for input in structure.inputs {
            assert!(guide.contains(input.key), "{} is missing", input.key);
        }
    }
}

#[test]
fn cautions_stand_where_they_must() {
    for name in ["README.md", "docs/methods.md"] {
        let text = document(name).to_lowercase();
        assert!(text.contains("never replace") || text.contains("licensed practice"), "{name}");
    }
    assert!(document("README.md").contains("dangerous"));
}

/// The TOML blocks of the documents that are whole station files, by their first key.
#[test]
fn station_files_in_the_documents_read_without_error() {
    let mut count = 0;
    for name in ["README.md", "docs/station-file.md"] {
        let text = document(name);
        let blocks = text.split("```toml\n").skip(1).filter_map(|rest| rest.split("```").next());
        for block in
            blocks.filter(|block| block.contains("[structure]") && block.contains("name = "))
        {
            let (station, findings) = nappe::station::read(block.as_bytes());
            assert!(station.is_some() && findings.is_empty(), "{name}: {findings:#?}\n{block}");
            count += 1;
        }
    }
    assert!(count >= 2, "only {count} blocks");
}

#[test]
fn the_worked_example_of_the_guide_is_the_one_that_is_compiled() {
    let guide = std::fs::read_to_string("DEVELOPERS.md").unwrap();
    let example = std::fs::read_to_string("tests/data/structures/worked_example.rs").unwrap();
    assert!(guide.contains(&example));
}
