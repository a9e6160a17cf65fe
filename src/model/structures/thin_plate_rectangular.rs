//! Rectangular thin-plate weir, Kindsvater-Carter equation, all ratios of crest to approach width.

use super::approach::{APPROACH_SIDE_SLOPE, MEAN_WIDTH};
use super::thin_plate::{self, HEAD_ADJUSTMENT, PUBLISHED_HEAD_ADJUSTMENT, WIDTH_ADJUSTMENT};
use super::{Adjustment, Constant, Implicit, InputSpec, PublishedTable, Regime, Structure, Values};
use crate::model::source::{FENTON, ISO_1438, KINDSVATER_CARTER};
use crate::model::{Confidence, Limit};
use crate::units::Dimension;

/// Ratios of crest width to approach width at which a and c are published.
const RATIOS: &[f64] = &[0.0, 0.2, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0];

pub(super) static STRUCTURE: Structure = Structure {
    kind: "thin-plate-rectangular",
    title: "Rectangular thin-plate weir (Kindsvater-Carter)",
    standard: ISO_1438,
    inputs: &[
        InputSpec::length("crest_width", "b", "width of the crest", "0.60 m"),
        // Left out, or equal to the crest width, it means a weir over the full width.
        InputSpec::length(
            "approach_width",
            "B",
            "width of the approach channel; left out or equal to the crest width: full width",
            "1.20 m",
        )
        .optional(),
        InputSpec::length("crest_height", "p", "height of the crest above the bed", "0.45 m"),
        APPROACH_SIDE_SLOPE,
        HEAD_ADJUSTMENT,
        WIDTH_ADJUSTMENT,
    ],
    choice: None,
    constants: &[
        Constant {
            symbol: "k_h_published",
            value: 0.001,
            dimension: Dimension::LENGTH,
            meaning: "head adjustment k_h",
            source: FENTON,
            confidence: Confidence::Seen,
        },
        Constant {
            symbol: "k_b_full",
            value: -0.0009,
            dimension: Dimension::LENGTH,
            meaning: "width adjustment k_b at full width",
            source: ISO_1438,
            confidence: Confidence::Memory,
        },
    ],
    tables: &[
        PublishedTable {
            name: "a",
            meaning: "first part of the coefficient; the values at b/B = 0.5 and 1 were seen",
            first: ("b/B", "1", RATIOS),
            second: None,
            unit: "1",
            values: &[0.587, 0.589, 0.591, 0.592, 0.593, 0.595, 0.597, 0.599, 0.602],
            source: KINDSVATER_CARTER,
            confidence: Confidence::Memory,
        },
        PublishedTable {
            name: "c",
            meaning: "part of the coefficient that grows with h/p; seen at b/B = 0.5 and 1",
            first: ("b/B", "1", RATIOS),
            second: None,
            unit: "1",
            values: &[-0.0023, -0.0018, 0.0058, 0.011, 0.018, 0.030, 0.045, 0.064, 0.075],
            source: KINDSVATER_CARTER,
            confidence: Confidence::Memory,
        },
        PublishedTable {
            name: "k_chart",
            meaning: "width adjustment; no node is known between 0.8 and 1",
            first: ("b/B", "1", &[0.0, 0.2, 0.4, 0.6, 0.8, 1.0]),
            second: None,
            unit: "mm",
            values: &[2.4, 2.4, 2.7, 3.6, 4.2, -0.9],
            source: KINDSVATER_CARTER,
            confidence: Confidence::Memory,
        },
    ],
    regimes: &[
        Regime {
            name: "contracted",
            when: "the crest is narrower than the approach channel",
            definitions: &[
                MEAN_WIDTH,
                ("r_b", "b/B_m"),
                ("C_e", "a(r_b) + c(r_b)*h/p"),
                ("k_h", "k_h_published + dk_h"),
                ("k_b", "k_chart(r_b) + dk_b"),
                ("b_e", "b + k_b"),
                ("h_e", "h + k_h"),
            ],
            discharge: "2/3*sqrt(2*g)*F_C*C_e*b_e*h_e^1.5",
            implicit: Implicit::Nothing,
            solved: None,
            flowing: "h + k_h_published + dk_h",
            beyond: None,
            borders: |_| &[],
            limits: &[
                MIN_HEAD,
                MIN_WIDTH,
                MIN_HEIGHT,
                MAX_RATIO,
                Limit::at_least("(B_m - b)/2", "0.10", "side contraction on each side")
                    .by(ISO_1438, Confidence::Memory),
            ],
            coefficient: thin_plate::COEFFICIENT,
        },
        Regime {
            name: "full width",
            when: "approach_width is left out or equals crest_width: one pair of walls",
            definitions: &[
                ("r_b", "1"),
                ("C_e", "a(r_b) + c(r_b)*h/p"),
                ("k_h", "k_h_published + dk_h"),
                ("k_b", "k_b_full + dk_b"),
                ("b_e", "b + k_b"),
                ("h_e", "h + k_h"),
            ],
            discharge: "2/3*sqrt(2*g)*F_C*C_e*b_e*h_e^1.5",
            implicit: Implicit::Nothing,
            solved: None,
            flowing: "h + k_h_published + dk_h",
            beyond: None,
            borders: |_| &[],
            limits: &[MIN_HEAD, MIN_WIDTH, MIN_HEIGHT, MAX_RATIO],
            coefficient: thin_plate::COEFFICIENT,
        },
    ],
    regime_for: |values: &Values| match values.given("approach_width") {
        None => 1,
        // A channel that widens upwards has no one pair of walls.
        Some(_) if values.given("approach_side_slope").is_some_and(|slope| slope > 0.0) => 0,
        Some(approach) => usize::from(approach == values.value("crest_width")),
    },
    adjustments: &[
        PUBLISHED_HEAD_ADJUSTMENT,
        Adjustment {
            name: "published width adjustment",
            acts_on: "width_adjustment",
            standard_uncertainty: "0.00015 when r_b <= 0.8 otherwise 0.00015 when 1 <= r_b otherwise 0.00052",
            words: "0.3 mm at 95 % for k_b; where 0.8 < b/B < 1 the chart is interpolated over its \
                    steepest part and 1 mm at 95 % is added (0.52 mm standard)",
            source: ISO_1438,
            confidence: Confidence::Memory,
        },
    ],
    critical: None,
    velocity_of_approach: "inside the coefficient, through h/p and b/B: the gauged head is used; in an \
                           approach with sloping sides B is area over depth at each head",
    drowned: &[],
    modular: thin_plate::FREE_NAPPE,
    head_measured: thin_plate::HEAD_MEASURED,
    head_in_approach: true,
    control_width: Some("crest_width"),
};

const MIN_HEAD: Limit = Limit::at_least("h", "0.03", "head").by(ISO_1438, Confidence::Memory);
const MIN_WIDTH: Limit =
    Limit::at_least("b", "0.15", "crest width").by(ISO_1438, Confidence::Memory);
const MIN_HEIGHT: Limit =
    Limit::at_least("p", "0.10", "crest height").by(ISO_1438, Confidence::Memory);
const MAX_RATIO: Limit =
    Limit::at_most("h/p", "2.5", "head over crest height").by(ISO_1438, Confidence::Memory);

#[cfg(test)]
mod tests {
    use crate::model::Model;
    use crate::model::structures::{CATALOGUE, Installation};

    #[test]
    fn the_derivative_by_gravity_reads_as_written_by_hand() {
        let form = Installation::plain(CATALOGUE[0]).forms().swap_remove(1);
        let mut model = Model::build(&form.blueprint).unwrap();
        let by_gravity = model.derivative(model.result(), model.input("gravity").unwrap());
        assert_eq!(model.text(by_gravity), "2/3*F_C*C_e*b_e*h_e^1.5/sqrt(2*g)");
    }
}
