//! Drawing errors from their distributions, block by block.

use rand::{Rng, RngExt};
use rand_distr::{Distribution as _, StandardNormal, StudentT};

use crate::propagation::Distribution;

/// Fills a block with errors.
///
/// The formulas are those of JCGM 101 6.4; r, r1, r2 are uniform on the open interval 0 to 1.
pub(in crate::propagation) fn draw(
    distribution: &Distribution,
    rng: &mut impl Rng,
    out: &mut [f64],
) {
    match distribution {
        Distribution::Fixed { mean } => out.fill(*mean),
        Distribution::Normal { mean, standard_uncertainty } => {
            for error in out {
                let z: f64 = StandardNormal.sample(rng);
                *error = mean + standard_uncertainty * z;
            }
        }
        Distribution::Rectangular { mean, half_width } => {
            for error in out {
                *error = mean + half_width * (2.0 * uniform(rng) - 1.0);
            }
        }
        Distribution::Triangular { mean, half_width } => {
            for error in out {
                *error = mean + half_width * (uniform(rng) + uniform(rng) - 1.0);
            }
        }
        Distribution::Trapezoidal { mean, half_width, flat_half_width } => {
            // The sum of two rectangulars of half-widths (a + f)/2 and (a - f)/2.
            let wide = half_width + flat_half_width;
            let narrow = half_width - flat_half_width;
            for error in out {
                *error = mean + wide * (uniform(rng) - 0.5) + narrow * (uniform(rng) - 0.5);
            }
        }
        Distribution::Arcsine { mean, half_width } => {
            out.fill_with(|| uniform(rng));
            for error in out {
                *error = mean + half_width * sine_of_turns(*error);
            }
        }
        Distribution::CurvilinearTrapezoid { mean, half_width, limit_half_width } => {
            for error in out {
                // The limits move together, the middle stays (6.4.3.4).
                let width = half_width + limit_half_width * (2.0 * uniform(rng) - 1.0);
                *error = mean + width * (2.0 * uniform(rng) - 1.0);
            }
        }
        Distribution::ScaledT { mean, scale, degrees_of_freedom } => {
            // StudentT refuses only degrees of freedom that are not positive, which no source has.
            match StudentT::new(*degrees_of_freedom) {
                Ok(t) => {
                    for error in out {
                        *error = mean + scale * t.sample(rng);
                    }
                }
                Err(_) => out.fill(f64::NAN),
            }
        }
        Distribution::Discrete { values, probabilities } => {
            for error in out {
                let mut left = uniform(rng);
                let chosen = probabilities.iter().position(|weight| {
                    left -= weight;
                    left < 0.0
                });
                // Rounding of the probabilities may leave a crumb: it belongs to the last value.
                *error = values[chosen.unwrap_or(values.len() - 1)];
            }
        }
        Distribution::Occasional { present, distribution } => {
            draw(distribution, rng, out);
            for error in out {
                if uniform(rng) >= *present {
                    *error = 0.0;
                }
            }
        }
    }
}

/// Uniform on the open interval 0 to 1 (JCGM 101 C.2: neither end may occur).
fn uniform(rng: &mut impl Rng) -> f64 {
    rng.sample(rand::distr::Open01)
}

/// sin(2 π r) for r from 0 to 1, to 1e-15: what vector code can compute, unlike a library's sine.
///
/// The turn is folded to the quarter about 0, where the series to the nineteenth power is exact to
/// rounding (its next term is (π/2)^21/21! = 3e-16).
fn sine_of_turns(turns: f64) -> f64 {
    // sin(2 π r) = -sin(2 π (r - 1/2)), and sin is symmetric about a quarter turn.
    let half = turns - 0.5;
    let quarter = if half.abs() > 0.25 { 0.5_f64.copysign(half) - half } else { half };
    let x = -std::f64::consts::TAU * quarter;
    let square = x * x;
    let mut sum = 0.0;
    for term in (1..=9_u32).rev() {
        let factor = f64::from(2 * term * (2 * term + 1));
        sum = (1.0 + sum) * -square / factor;
    }
    x * (1.0 + sum)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_sine_of_turns_is_that_of_the_library() {
        for i in 0..=10_000 {
            let turns = f64::from(i) / 10_000.0;
            let library = (std::f64::consts::TAU * turns).sin();
            assert!((sine_of_turns(turns) - library).abs() < 2e-15, "{turns}");
        }
    }
}
