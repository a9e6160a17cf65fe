//! Dimensions: exponents of length, mass, time, temperature and plane angle.

use std::fmt;

use super::Rational;

/// The dimension of a quantity, with exact exponents.
///
/// A plane angle counts as a dimension of its own where a file states a quantity (`"90 deg"`), so
/// that a bare 90 is not taken for radians; inside an equation it is dimensionless, as in the SI
/// ([`Dimension::in_equations`]).
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct Dimension {
    exponents: [Rational; 5],
}

/// SI symbols in the order of the exponents.
const BASE: [&str; 5] = ["m", "kg", "s", "K", "rad"];
const ANGLE_INDEX: usize = 4;

impl Dimension {
    /// No dimension.
    pub const NONE: Self = Self::of(0, 0, 0, 0, 0);
    /// Length.
    pub const LENGTH: Self = Self::of(1, 0, 0, 0, 0);
    /// Area.
    pub const AREA: Self = Self::of(2, 0, 0, 0, 0);
    /// Volume.
    pub const VOLUME: Self = Self::of(3, 0, 0, 0, 0);
    /// Mass.
    pub const MASS: Self = Self::of(0, 1, 0, 0, 0);
    /// Time.
    pub const TIME: Self = Self::of(0, 0, 1, 0, 0);
    /// Temperature difference.
    pub const TEMPERATURE: Self = Self::of(0, 0, 0, 1, 0);
    /// Plane angle.
    pub const ANGLE: Self = Self::of(0, 0, 0, 0, 1);
    /// Acceleration.
    pub const ACCELERATION: Self = Self::of(1, 0, -2, 0, 0);
    /// What a coefficient of `b h^1.5` has that gravity is part of.
    pub const ROOT_LENGTH_PER_TIME: Self = Self {
        exponents: [
            Rational::HALF,
            Rational::whole(0),
            Rational::whole(-1),
            Rational::whole(0),
            Rational::whole(0),
        ],
    };
    /// Volume per time.
    pub const DISCHARGE: Self = Self::of(3, 0, -1, 0, 0);
    /// Pressure.
    pub const PRESSURE: Self = Self::of(-1, 1, -2, 0, 0);

    /// Whole exponents of length, mass, time, temperature and angle.
    pub const fn of(length: i64, mass: i64, time: i64, temperature: i64, angle: i64) -> Self {
        Self {
            exponents: [
                Rational::whole(length),
                Rational::whole(mass),
                Rational::whole(time),
                Rational::whole(temperature),
                Rational::whole(angle),
            ],
        }
    }

    /// The dimension of a product; `None` if an exponent overflows.
    pub fn times(self, other: Self) -> Option<Self> {
        let mut exponents = self.exponents;
        for (exponent, more) in exponents.iter_mut().zip(other.exponents) {
            *exponent = exponent.plus(more)?;
        }
        Some(Self { exponents })
    }

    /// The dimension of a quotient; `None` if an exponent overflows.
    pub fn per(self, other: Self) -> Option<Self> {
        self.times(other.power(Rational::whole(-1))?)
    }

    /// The dimension of a power; `None` if an exponent overflows.
    pub fn power(self, exponent: Rational) -> Option<Self> {
        let mut exponents = self.exponents;
        for each in &mut exponents {
            *each = each.times(exponent)?;
        }
        Some(Self { exponents })
    }

    /// No dimension, and no angle.
    pub fn is_none(self) -> bool {
        self == Self::NONE
    }

    /// The dimension that counts inside an equation: an angle is a pure number there.
    #[must_use]
    pub fn in_equations(mut self) -> Self {
        self.exponents[ANGLE_INDEX] = Rational::ZERO;
        self
    }

    /// What the dimension is called, where the trade has a word for it.
    pub fn name(self) -> Option<&'static str> {
        let known = [
            (Self::NONE, "a pure number"),
            (Self::LENGTH, "a length"),
            (Self::AREA, "an area"),
            (Self::VOLUME, "a volume"),
            (Self::MASS, "a mass"),
            (Self::TIME, "a time"),
            (Self::TEMPERATURE, "a temperature difference"),
            (Self::ANGLE, "an angle"),
            (Self::ACCELERATION, "an acceleration"),
            (Self::DISCHARGE, "a discharge"),
            (Self::PRESSURE, "a pressure"),
            (Self::of(1, 0, -1, 0, 0), "a velocity"),
            (Self::of(0, 1, -1, 0, 0), "a mass flow"),
            (Self::of(-3, 1, 0, 0, 0), "a density"),
            (Self::of(-1, 1, -1, 0, 0), "a dynamic viscosity"),
            (Self::of(0, 0, -1, 0, 0), "a rate per time"),
        ];
        known.iter().find(|(dimension, _)| *dimension == self).map(|(_, name)| *name)
    }

    /// The name with the SI unit, for messages: `a length (m)`.
    pub fn described(self) -> String {
        match self.name() {
            Some(name) if self.is_none() => name.to_owned(),
            Some(name) => format!("{name} ({self})"),
            None => format!("a quantity in {self}"),
        }
    }

    /// Units a user would write for it, for hints.
    pub fn usual_units(self) -> &'static str {
        let known = [
            (Self::LENGTH, "m, cm, mm, ft or in"),
            (Self::AREA, "m2 or ft2"),
            (Self::VOLUME, "m3, l, Ml, ft3, gal or acre-ft"),
            (Self::MASS, "kg, g, mg or t"),
            (Self::TIME, "s, min, h, days or years"),
            (Self::TEMPERATURE, "K"),
            (Self::ANGLE, "deg or rad"),
            (Self::ACCELERATION, "m/s2 or ft/s2"),
            (Self::DISCHARGE, "m3/s, l/s, m3/h, m3/d, Ml/d, cfs, gpm or mgd"),
            (Self::PRESSURE, "Pa, hPa, kPa or bar"),
        ];
        known.iter().find(|(dimension, _)| *dimension == self).map_or("", |(_, units)| *units)
    }
}

impl fmt::Display for Dimension {
    /// The coherent SI unit, in the notation of station files: `m3/s`, `m^0.5/s`, `1`.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let factor = |(exponent, symbol): (Rational, &str)| match exponent.as_whole() {
            Some(1) => symbol.to_owned(),
            Some(whole) => format!("{symbol}{whole}"),
            None => match exponent.to_string() {
                fraction if fraction.contains('/') => format!("{symbol}^({fraction})"),
                decimal => format!("{symbol}^{decimal}"),
            },
        };
        let above: Vec<String> = self
            .exponents
            .into_iter()
            .zip(BASE)
            .filter(|(exponent, _)| exponent.numerator() > 0)
            .map(factor)
            .collect();
        let mut below = String::new();
        for (exponent, symbol) in self.exponents.into_iter().zip(BASE) {
            if exponent.is_negative() {
                below += "/";
                below += &factor((exponent.negated(), symbol));
            }
        }
        let above = if above.is_empty() { "1".to_owned() } else { above.join(" ") };
        write!(f, "{above}{below}")
    }
}
