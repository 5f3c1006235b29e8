//! Smoothed staircase of a rectangle against the sum over its orbits, which is exact.
//!
//! Levels of the a x b rectangle with Dirichlet walls: k^2 = pi^2 (m^2/a^2 + n^2/b^2), m, n >= 1. Poisson summation gives
//! N(k) = a b k^2/(4 pi) - (a + b) k/(2 pi) + 1/4 + sum over (M, N) != 0 of a b/(2 pi L) k J1(k L) with L = 2 sqrt(M^2 a^2 + N^2 b^2)
//! - sum over M >= 1 of sin(2 M k a)/(2 pi M) - the same with b (Balian & Bloch, Ann. Phys. 69, 1972).

use std::f64::consts::PI;

use num_complex::Complex64;
use orbitsum::levels::{ResidualWindow, density, residual_rms, staircase};
use orbitsum::trace::{Amplitude, Term, UniformGrid, sum_on_grid};

const A: f64 = 1.0;
const B: f64 = 1.3;

fn levels(below: f64) -> Vec<f64> {
    let count = |side: f64| (below * side / PI) as i32 + 1;
    let mut levels = Vec::new();
    for m in 1..=count(A) {
        for n in 1..=count(B) {
            let k = PI * (f64::from(m) / A).hypot(f64::from(n) / B);
            if k < below {
                levels.push(k);
            }
        }
    }
    levels.sort_by(f64::total_cmp);
    levels
}

fn terms(longest: f64) -> Vec<Term> {
    let reach = (longest / 2.0) as i32 + 1;
    let mut terms = Vec::new();
    for m in -reach..=reach {
        for n in -reach..=reach {
            let length = 2.0 * (f64::from(m) * A).hypot(f64::from(n) * B);
            if length > 0.0 && length <= longest {
                let coefficient = Complex64::new(A * B / (2.0 * PI * length), 0.0);
                terms.push(Term {
                    length,
                    coefficient,
                    amplitude: Amplitude::Strip,
                    repetition: 1,
                });
            }
        }
    }
    for (m, side) in (1..=reach).flat_map(|m| [(m, A), (m, B)]) {
        let length = 2.0 * f64::from(m) * side;
        if length <= longest {
            // Re[i exp(i k l)] = -sin(k l)
            let coefficient = Complex64::new(0.0, 1.0 / (2.0 * PI * f64::from(m)));
            terms.push(Term {
                length,
                coefficient,
                amplitude: Amplitude::Constant,
                repetition: m as u32,
            });
        }
    }
    terms
}

#[test]
fn orbit_sum_is_exact() {
    let levels = levels(60.0);
    let grid = UniformGrid {
        start: 10.0,
        step: 0.02,
        count: 1751,
    };
    let points = grid.points();
    // s L_max = 6.5 leaves exp(-6.5^2/2) = 7e-10 of the first term left out, and there are many; 7.8 leaves 6e-14.
    for (smoothing, longest, limit) in [(0.5, 13.0, 1e-6), (0.6, 13.0, 1e-10)] {
        let exact = staircase(&levels, &points, smoothing);
        let sum = sum_on_grid(&terms(longest), &grid, smoothing, 1e-12);
        let smooth = |k: f64| {
            A * B * (k * k + smoothing * smoothing) / (4.0 * PI) - (A + B) * k / (2.0 * PI) + 0.25
        };
        let difference: Vec<f64> = (0..points.len())
            .map(|index| exact[index] - smooth(points[index]) - sum.staircase[index])
            .collect();
        let window = ResidualWindow {
            from: 10.0,
            to: 45.0,
            list_end: 60.0,
            smoothing,
        };
        let residual = residual_rms(&points, &difference, &window);
        assert_eq!(residual.points, 1751);
        let rms = residual.rms.expect("points inside");
        assert!(rms < limit, "s = {smoothing}: {rms:e}");
        let exact = density(&levels, &points, smoothing);
        for (index, k) in points.iter().enumerate() {
            let smooth = A * B * k / (2.0 * PI) - (A + B) / (2.0 * PI);
            let difference = exact[index] - smooth - sum.density[index];
            assert!(
                difference.abs() < 100.0 * limit,
                "density at {k}: {difference:e}"
            );
        }
    }
}
