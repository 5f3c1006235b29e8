//! The window function.

use crate::trace::UniformGrid;
use std::f64::consts::PI;

/// Blackman's window (R. B. Blackman & J. W. Tukey, The Measurement of Power Spectra, 1958): a0 + a1 cos(2 pi u) + a2 cos(4 pi u) for
/// u from -1/2 to 1/2.
const COSINES: [f64; 3] = [0.42, 0.5, 0.08];
/// Distance of the first zero of its transform from the maximum, in units of 2 pi over the width of the window.
const MAIN_LOBE: f64 = 3.0;
/// Full width of its transform at half of the maximum, in the same units (computed from the formula, as the test below does; so are
/// the next two).
const HALF_MAXIMUM: f64 = 2.2988;
/// Width of a rectangle that lets through as much noise, in the same units.
const NOISE_WIDTH: f64 = 1.7268;
/// Largest side lobe relative to the maximum, -58 dB; further out they fall as the third power.
const SIDE_LOBE: f64 = 1.25e-3;
/// Points of a length grid per resolution: the parabola through a maximum's three points misses its height by 1e-4.
const POINTS: f64 = 16.0;

/// Blackman's window function between two wave numbers, 1 in the middle and 0 with its slope at both ends.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Taper {
    /// Lower end.
    pub from: f64,
    /// Upper end, above `from`.
    pub to: f64,
}

impl Taper {
    /// Weight at k, 0 outside.
    #[must_use]
    pub fn weight(&self, k: f64) -> f64 {
        if !(self.from..=self.to).contains(&k) {
            return 0.0;
        }
        let turn = 2.0 * PI * ((k - self.from) / (self.to - self.from) - 0.5);
        COSINES[0] + COSINES[1] * turn.cos() + COSINES[2] * (2.0 * turn).cos()
    }

    /// Integral of the weight.
    #[must_use]
    pub fn area(&self) -> f64 {
        COSINES[0] * (self.to - self.from)
    }

    /// One unit of length: 2 pi over the width of the window.
    fn bin(&self) -> f64 {
        2.0 * PI / (self.to - self.from)
    }

    /// Height at a distance in length from a peak of height 1 (side lobes may be negative).
    #[must_use]
    pub fn response(&self, distance: f64) -> f64 {
        let x = distance / self.bin();
        let sinc = |x: f64| {
            if x == 0.0 {
                1.0
            } else {
                (PI * x).sin() / (PI * x)
            }
        };
        let pair = |shift: f64| 0.5 * (sinc(x - shift) + sinc(x + shift));
        (COSINES[0] * sinc(x) + COSINES[1] * pair(1.0) + COSINES[2] * pair(2.0)) / COSINES[0]
    }

    /// Full width of a peak at half of its height: lengths that are closer are not told apart.
    #[must_use]
    pub fn resolution(&self) -> f64 {
        HALF_MAXIMUM * self.bin()
    }

    /// Distance from a peak at which it has ended, but for side lobes. Below this length an orbit cannot be told from an error of
    /// the smooth density.
    #[must_use]
    pub fn main_lobe(&self) -> f64 {
        MAIN_LOBE * self.bin()
    }

    /// Extent in length of one independent value of a noise.
    #[must_use]
    pub fn cell(&self) -> f64 {
        NOISE_WIDTH * self.bin()
    }

    /// Largest side lobe, relative to the peak.
    #[must_use]
    pub fn side_lobe() -> f64 {
        SIDE_LOBE
    }

    /// The lengths at which a spectrum is taken: from the main lobe on up to `longest`. `None` if that leaves no peak.
    #[must_use]
    pub fn lengths(&self, longest: f64) -> Option<UniformGrid> {
        let start = self.main_lobe();
        let intervals = ((longest - start) * POINTS / self.resolution()).ceil();
        (intervals >= POINTS && intervals < usize::MAX as f64).then(|| UniformGrid {
            start,
            step: (longest - start) / intervals,
            count: intervals as usize + 1,
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const TAPER: Taper = Taper {
        from: 3.0,
        to: 45.0,
    };

    #[test]
    fn the_response_is_the_transform_of_the_weight() {
        let n = 4000;
        let step = (TAPER.to - TAPER.from) / f64::from(n);
        for distance in [0.0, 0.1, 0.33, 0.7, 2.0, 7.77] {
            let sum: f64 = (0..n)
                .map(|i| TAPER.from + step * f64::from(i))
                .map(|k| TAPER.weight(k) * (distance * (k - 24.0)).cos())
                .sum();
            let expected = sum * step / TAPER.area();
            assert!(
                (TAPER.response(distance) - expected).abs() < 1e-9,
                "{distance}"
            );
        }
        assert_eq!(TAPER.weight(2.9) + TAPER.weight(45.1), 0.0);
        assert!((TAPER.weight(24.0) - 1.0).abs() < 1e-15);
    }

    #[test]
    fn widths_and_side_lobes_are_those_of_the_window() {
        let bin = TAPER.bin();
        assert!((TAPER.response(0.5 * TAPER.resolution()) - 0.5).abs() < 1e-4);
        assert!(TAPER.response(TAPER.main_lobe()).abs() < 1e-12);
        let far = (0..4000).map(|i| TAPER.response((3.0 + 0.005 * f64::from(i)) * bin).abs());
        let largest = far.fold(0.0, f64::max);
        assert!(
            largest < SIDE_LOBE && largest > 0.95 * SIDE_LOBE,
            "{largest}"
        );
        let squares: f64 = (-8000..8000)
            .map(|i| TAPER.response(0.005 * f64::from(i) * bin).powi(2))
            .sum();
        assert!((0.005 * squares - NOISE_WIDTH).abs() < 1e-4, "{squares}");
    }

    #[test]
    fn a_window_that_resolves_nothing_has_no_lengths() {
        assert!(TAPER.lengths(0.5).is_none());
        assert!(TAPER.lengths(f64::NAN).is_none() && TAPER.lengths(f64::INFINITY).is_none());
        let grid = TAPER.lengths(10.0).expect("lengths");
        assert!((grid.point(grid.count - 1) - 10.0).abs() < 1e-12);
    }
}
