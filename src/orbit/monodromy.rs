//! Products of flights and reflections in twice the working precision.
//!
//! The linearised map of an orbit with trace 10^5 has entries of that size, and its determinant, which is 1, is the
//! difference of products of 10^10: in working precision ten of sixteen digits are lost. The entries are therefore kept as
//! unevaluated sums of two numbers (Dekker, Numer. Math. 18, 1971; Knuth, The Art of Computer Programming 2, 4.2.2).

use crate::billiard::Mat2;
use std::ops::{Add, Mul, Neg};

/// A sum of two numbers, the second below the rounding of the first.
#[derive(Clone, Copy, Debug)]
struct Double {
    high: f64,
    low: f64,
}

impl Double {
    /// high + low without loss, for any two numbers.
    fn sum(a: f64, b: f64) -> Self {
        let high = a + b;
        let part = high - a;
        Self {
            high,
            low: (a - (high - part)) + (b - part),
        }
    }

    /// a b without loss.
    fn product(a: f64, b: f64) -> Self {
        let high = a * b;
        let ((a1, a2), (b1, b2)) = (split(a), split(b));
        Self {
            high,
            low: ((a1 * b1 - high) + a1 * b2 + a2 * b1) + a2 * b2,
        }
    }

    fn value(self) -> f64 {
        self.high + self.low
    }
}

/// Upper and lower half of the digits (Veltkamp).
fn split(a: f64) -> (f64, f64) {
    let shifted = a * 134_217_729.0;
    let upper = shifted - (shifted - a);
    (upper, a - upper)
}

impl From<f64> for Double {
    fn from(high: f64) -> Self {
        Self { high, low: 0.0 }
    }
}

impl Add for Double {
    type Output = Self;
    fn add(self, other: Self) -> Self {
        let sum = Self::sum(self.high, other.high);
        Self::sum(sum.high, sum.low + self.low + other.low)
    }
}

impl Mul for Double {
    type Output = Self;
    fn mul(self, other: Self) -> Self {
        let product = Self::product(self.high, other.high);
        Self::sum(
            product.high,
            product.low + self.high * other.low + self.low * other.high,
        )
    }
}

impl Neg for Double {
    type Output = Self;
    fn neg(self) -> Self {
        Self {
            high: -self.high,
            low: -self.low,
        }
    }
}

/// A linearised map that is being built, rows (displacement, angle).
#[derive(Clone, Copy, Debug)]
pub(crate) struct Monodromy {
    rows: [[Double; 2]; 2],
}

impl Monodromy {
    /// The identity times +1 or -1.
    pub(crate) fn identity(sign: f64) -> Self {
        let (one, zero) = (Double::from(sign), Double::from(0.0));
        Self {
            rows: [[one, zero], [zero, one]],
        }
    }

    /// A free flight follows: displacement += length x angle.
    pub(crate) fn fly(&mut self, length: f64) {
        let length = Double::from(length);
        let [displacement, angle] = self.rows;
        self.rows[0] = [
            displacement[0] + length * angle[0],
            displacement[1] + length * angle[1],
        ];
    }

    /// A reflection of strength 2 kappa/cos(theta) follows.
    pub(crate) fn reflect(&mut self, strength: f64) {
        let strength = Double::from(strength);
        let [displacement, angle] = self.rows;
        self.rows = [
            [-displacement[0], -displacement[1]],
            [
                strength * displacement[0] + -angle[0],
                strength * displacement[1] + -angle[1],
            ],
        ];
    }

    /// Multiplies by +1 or -1.
    pub(crate) fn scale(&mut self, sign: f64) {
        if sign < 0.0 {
            self.rows = self.rows.map(|row| row.map(Neg::neg));
        }
    }

    /// The entries, rounded.
    pub(crate) fn matrix(&self) -> Mat2 {
        let [a, b] = self.rows;
        Mat2::new(a[0].value(), a[1].value(), b[0].value(), b[1].value())
    }

    /// The determinant, from the unrounded entries.
    pub(crate) fn determinant(&self) -> f64 {
        let [a, b] = self.rows;
        (a[0] * b[1] + -(a[1] * b[0])).value()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::billiard::{flight, reflection};
    use proptest::prelude::*;

    proptest! {
        /// Against products of nalgebra's matrices, and det = 1 where those have lost it.
        #[test]
        fn agrees_with_plain_products(steps in prop::collection::vec((0.1..3.0f64, -4.0..4.0f64), 1..12)) {
            let mut careful = Monodromy::identity(1.0);
            let mut plain = Mat2::identity();
            for &(length, strength) in &steps {
                careful.fly(length);
                careful.reflect(strength);
                plain = reflection(0.5 * strength, 1.0) * flight(length) * plain;
            }
            let scale = plain.norm();
            prop_assert!((careful.matrix() - plain).norm() < 1e-13 * scale * steps.len() as f64);
            prop_assert!((careful.determinant() - 1.0).abs() < 1e-12 + 1e-29 * scale * scale);
        }
    }
}
