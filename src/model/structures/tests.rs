//! What must be true of every structure of the catalogue.

use super::*;
use crate::model::Model;
use crate::units::Dimension;

/// The catalogue, and the worked example of the contributor's guide.
fn structures() -> impl Iterator<Item = &'static Structure> {
    CATALOGUE.iter().copied().chain([&worked_example::STRUCTURE])
}

/// Every installation that differs in its equation: each option, each drowned-flow equation.
fn installations() -> Vec<Installation> {
    let mut all = Vec::new();
    for structure in structures() {
        let sets = structure.choice.map_or(1, |choice| choice.sets.len());
        for set in 0..sets {
            let plain = Installation { set, ..Installation::plain(structure) };
            let drowned = plain.drowned().into_iter().map(Some).chain([None]);
            for drowned in drowned {
                let second = SecondHead { drowned, modular_limit: Some(0.7), curve: None };
                all.push(Installation { second_head: Some(second), ..plain.clone() });
            }
            all.push(plain);
        }
    }
    all
}

#[test]
fn every_structure_builds_in_every_form_and_gives_a_discharge() {
    for installation in installations() {
        for form in installation.forms() {
            let kind = installation.structure.kind;
            let mut model = Model::build(&form.blueprint).unwrap();
            assert_eq!(model.result_dimension(), Dimension::DISCHARGE, "{kind}");
            for limit in &form.limits {
                let (_, of_quantity) = model.expression(&limit.quantity).unwrap();
                let (_, of_bound) = model.expression(&limit.bound).unwrap();
                // A bound in symbols has the dimension of what it bounds; a number is in its SI unit.
                let named =
                    limit.bound.contains(|c: char| c.is_alphabetic() && c != 'p' && c != 'i');
                assert!(!named || of_bound == of_quantity, "{kind}: {limit:?}");
                if let Some(applies) = &limit.applies {
                    model.expression(applies).unwrap();
                }
            }
            for source in &form.automatic {
                let (_, dimension) = model.expression(&source.rule).unwrap();
                assert!(dimension.is_none(), "{kind}: {}", source.rule);
                assert!(model.input(&source.acts_on).is_some());
            }
            if let Some(highest) = &form.highest_tailwater {
                model.expression(highest).unwrap();
            }
        }
    }
}

#[test]
fn all_forms_of_a_structure_bring_the_same_sources() {
    for installation in installations() {
        let names = |form: &Form| -> Vec<String> {
            form.automatic.iter().map(|source| source.name.clone()).collect()
        };
        let forms = installation.forms();
        assert!(forms.iter().all(|form| names(form) == names(&forms[0])));
    }
}

#[test]
fn every_table_of_the_catalogue_is_complete() {
    for table in CATALOGUE.iter().flat_map(|structure| structure.tables) {
        assert!(table.in_si().is_some(), "{}", table.name);
    }
    for choice in CATALOGUE.iter().filter_map(|structure| structure.choice) {
        assert!(choice.find(choice.example).is_some());
        for (word, values) in choice.sets {
            assert_eq!(values.len(), choice.symbols.len(), "{word}");
        }
    }
}

#[test]
fn an_option_is_found_however_its_number_is_written() {
    let choice = find("parshall-flume").unwrap().choice.unwrap();
    assert_eq!(choice.find("0.3 m"), choice.find("0.30 m"));
    assert_eq!(choice.find("1 m"), choice.find("1.00 m"));
    assert!(choice.find("1 ft").is_some());
    assert_eq!(choice.find("0.31 m"), None);
}

#[test]
fn sections_are_structures_whose_head_is_read_in_the_common_approach() {
    let cannot: Vec<&str> = CATALOGUE
        .iter()
        .filter(|structure| !structure.head_in_approach)
        .map(|structure| structure.kind)
        .collect();
    assert_eq!(cannot, ["parshall-flume", "end-depth", "compound"]);
}
