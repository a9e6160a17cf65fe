//! A structure with its inputs, to evaluate an expression of it: what the tests of values share.

use nappe::model::Model;
use nappe::model::structures::{
    Form, Installation, InstalledLimit, LimitKind, SecondHead, Values, find,
};

/// What a station has: its structure, the size of it, its drowned-flow equation, its inputs.
pub(crate) struct Case {
    kind: &'static str,
    size: Option<&'static str>,
    drowned: Option<&'static str>,
    tailwater: bool,
    inputs: Vec<(&'static str, f64)>,
}

impl Case {
    pub(crate) fn of(kind: &'static str, inputs: &[(&'static str, f64)]) -> Self {
        Self { kind, size: None, drowned: None, tailwater: false, inputs: inputs.to_vec() }
    }

    pub(crate) fn size(self, word: &str) -> Self {
        let choice = find(self.kind).unwrap().choice.unwrap();
        let known = choice.sets[choice.find(word).unwrap()].0;
        Self { size: Some(known), ..self }
    }

    pub(crate) fn drowned(self, name: &'static str) -> Self {
        Self { drowned: Some(name), tailwater: true, ..self }
    }

    /// The tailwater is known, and no equation for drowned flow is in force.
    pub(crate) fn tailwater(self) -> Self {
        Self { tailwater: true, ..self }
    }

    /// The value of an expression; inputs that are not given have their defaults, or 1.
    pub(crate) fn value(&self, text: &str) -> f64 {
        let (form, inputs) = self.form();
        let mut model = Model::build(&form.blueprint).unwrap();
        let (id, _) = model.expression(text).unwrap();
        model.evaluate(&[id], &inputs).0[0]
    }

    /// The bound of critical flow on a quantity.
    pub(crate) fn critical_bound(&self, quantity: &str) -> f64 {
        let (form, _) = self.form();
        let critical = |limit: &&InstalledLimit| {
            limit.kind == LimitKind::Critical && limit.quantity == quantity
        };
        self.value(&form.limits.iter().find(critical).unwrap().bound)
    }

    fn form(&self) -> (Form, Vec<f64>) {
        let mut installed = Installation::plain(find(self.kind).unwrap());
        let structure = installed.structure;
        if let Some(word) = self.size {
            installed.set = structure.choice.unwrap().find(word).unwrap();
        }
        if self.tailwater {
            let named = |name| structure.drowned.iter().position(|each| each.name == name);
            let drowned = self.drowned.map(|name| named(name).unwrap());
            // For structures whose limit nobody published.
            let modular_limit = structure.modular.ratio.is_none().then_some(0.75);
            let modular_limit = modular_limit.filter(|_| structure.choice.is_none());
            installed.second_head = Some(SecondHead { drowned, modular_limit, curve: None });
        }
        let given =
            |key: &str| self.inputs.iter().find(|(k, _)| *k == key).map(|(_, value)| *value);
        let specs = installed.inputs();
        let all: Vec<Option<f64>> =
            specs.iter().map(|input| given(&input.key).or(input.spec.default_value())).collect();
        for (key, _) in &self.inputs {
            assert!(specs.iter().any(|input| input.key == *key), "{} has no {key}", self.kind);
        }
        let keys = specs.iter().map(|input| input.key.clone());
        let values = Values::new(keys.zip(all.iter().copied()));
        let form = installed.form(&values);
        (form, all.into_iter().map(|value| value.unwrap_or(1.0)).collect())
    }
}

/// An approach so wide and deep that its velocity is nothing, and the total head the gauged head.
pub(crate) const STILL: f64 = 1e4;
