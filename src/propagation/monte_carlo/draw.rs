//! Drawing errors from their distributions, block by block.

use rand::{Rng, RngExt};
use rand_distr::{Distribution as _, StandardNormal, StudentT};

use crate::propagation::Distribution;

/// Fills a block with errors.
///
/// The formulas are those of JCGM 101 6.4; r, r1, r2 are uniform on the open interval 0 to 1.
pub(in crate::propagation) fn draw(
    distribution: &Distribution,
    rng: &mut (impl Rng + Clone),
    out: &mut [f64],
) {
    match distribution {
        Distribution::Fixed { mean } => out.fill(*mean),
        Distribution::Normal { mean, standard_uncertainty } => {
            // A stream of its own for the loop stays in registers; scaling runs over the block at once.
            let mut stream = rng.clone();
            for error in &mut *out {
                *error = StandardNormal.sample(&mut stream);
            }
            *rng = stream;
            for error in out {
                *error = mean + standard_uncertainty * *error;
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
            out.fill_with(|| 2.0 * uniform(rng) - 1.0);
            for error in out {
                *error = mean + half_width * sine_of_quarters(*error);
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

/// sin(π x / 2) for x from -1 to 1, exact to rounding: what vector code can compute, and the same bits
/// on every machine, unlike a library's sine.
///
/// The sine of an angle that is uniform over half a turn has the arcsine distribution as well as that of
/// one uniform over a whole turn.
#[inline]
fn sine_of_quarters(x: f64) -> f64 {
    let square = x * x;
    SERIES.iter().fold(0.0, |sum, term| sum * square + term) * x
}

/// Terms of the series, (-1)^k (π/2)^(2k+1) / (2k+1)!, from k = 10 down to 0; the next is 1e-18.
const SERIES: [f64; 11] = {
    let mut terms = [0.0; 11];
    let mut term = std::f64::consts::FRAC_PI_2;
    let mut k = 0;
    while k < terms.len() {
        terms[terms.len() - 1 - k] = term;
        let next = 2.0 * k as f64 + 2.0;
        term *= -std::f64::consts::FRAC_PI_2 * std::f64::consts::FRAC_PI_2 / (next * (next + 1.0));
        k += 1;
    }
    terms
};

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_sine_is_that_of_the_library() {
        for i in -10_000..=10_000 {
            let x = f64::from(i) / 10_000.0;
            let library = (std::f64::consts::FRAC_PI_2 * x).sin();
            assert!((sine_of_quarters(x) - library).abs() < 5e-16, "{x}");
        }
    }
}
