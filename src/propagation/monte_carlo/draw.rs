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
            for error in out {
                *error = mean + half_width * (std::f64::consts::TAU * uniform(rng)).sin();
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
