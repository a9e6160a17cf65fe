//! The approach channel: its area and widths, the total head in it, its Froude number, and what critical
//! flow at a rectangular control needs of it.

use super::input::InputSpec;
use super::published::CriticalFlow;
use crate::model::Limit;
use crate::model::Unsourced;

/// Total head above the crest, with the velocity of approach.
pub(super) const TOTAL_HEAD: (&str, &str) = ("H", "h + alpha*Q^2/(2*g*A^2)");
/// Area of a rectangular approach at the gauge.
pub(super) const RECTANGULAR: (&str, &str) = ("A", "B*(h + p)");
/// Area of a trapezoidal approach at the gauge.
pub(super) const TRAPEZOIDAL: (&str, &str) = ("A", "(B + m_a*(h + p))*(h + p)");
/// Mean width of a trapezoidal approach: area over depth.
pub(super) const MEAN_WIDTH: (&str, &str) = ("B_m", "B + m_a*(h + p)");
/// Width of a trapezoidal approach at the water level.
pub(super) const TOP_WIDTH: (&str, &str) = ("W_a", "B + 2*m_a*(h + p)");
/// Velocity-of-approach coefficient of an equation in `H^1.5`.
pub(super) const VELOCITY_COEFFICIENT: (&str, &str) = ("C_V", "(H/h)^1.5");
/// Froude number of a rectangular approach.
pub(super) const FROUDE: (&str, &str) = ("Fr", "Q/(A*sqrt(g*A/B))");
/// Froude number of a trapezoidal approach.
pub(super) const FROUDE_TRAPEZOIDAL: (&str, &str) = ("Fr", "Q/(A*sqrt(g*A/W_a))");

/// The largest flow that the energy equation of the approach allows: at the last solution of
/// `H = h + alpha Q^2/(2 g A^2)` with `Q` as `H^n`, the velocity head is `h/(2n - 1)`, at most half of
/// the head for the smallest n, 1.5 (methods, total head).
pub(super) const LARGEST_FLOW: &str = "A*sqrt(g*h/alpha)";

/// The width of a rectangular approach.
pub(super) const APPROACH_WIDTH: InputSpec =
    InputSpec::length("approach_width", "B", "width of the approach channel", "1.20 m");

/// The side slope of an approach that is wider at the water than at the bed.
pub(super) const APPROACH_SIDE_SLOPE: InputSpec = InputSpec::number(
    "approach_side_slope",
    "m_a",
    "side slope of the approach channel, horizontal per vertical; approach_width is then at the bed",
    [0.0, 20.0],
    "0 is a vertical wall, 20 a very flat bank",
    "0",
)
.or(0.0);

/// An upper limit of the approach's Froude number.
pub(super) const fn froude_at_most(bound: &'static str) -> Unsourced {
    Limit::at_most("Fr", bound, "Froude number of the approach")
}

/// How the velocity of approach enters an equation in the total head.
pub(super) const THROUGH_TOTAL_HEAD: &str =
    "through the total head H = h + alpha v^2/(2 g), solved together with the discharge";

/// When an equation holds that has no form for drowned flow.
pub(super) const WHILE_MODULAR: &str = "always: the equation holds while the flow is modular";

/// A rectangular control of width `b` on a sill of height `p`, in an approach of width `B`.
pub(super) const RECTANGULAR_CONTROL: CriticalFlow = CriticalFlow {
    energy: "1.5*(alpha*(Q/b)^2/g)^(1/3)",
    sill: "p",
    width: Some("b"),
    approach: ("B", None),
};
