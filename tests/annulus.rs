//! Annulus against zeros of cross products of Bessel functions.

#[allow(dead_code)]
mod integrable;

use integrable::{Order, Weyl, all_terms, levels, residual};
use orbitsum::billiard::Condition::{Dirichlet, Neumann};
use orbitsum::orbit::tori::Integrable;
use std::f64::consts::PI;

const WINDOWS: [(f64, f64); 3] = [(20.0, 30.0), (30.0, 45.0), (45.0, 60.0)];

#[test]
fn measure() {
    for (outer, inner, file) in [(Dirichlet, Dirichlet, "annulus_dd.csv"), (Dirichlet, Neumann, "annulus_dn.csv"), (Neumann, Neumann, "annulus_nn.csv")] {
        let w = |c| if c == Dirichlet { 1.0 } else { 5.0 };
        let weyl = Weyl {
            area: 0.75 * PI,
            length: -(outer.sign() * 2.0 * PI + inner.sign() * PI),
            constant: 0.0,
            inverse_k: (w(outer) + 2.0 * w(inner)) / 128.0,
        };
        let levels = levels(file);
        let shape = Integrable::Annulus { outer_radius: 1.0, inner_radius: 0.5, outer, inner };
        for window in WINDOWS {
            for s in [weyl.spacings(2.0, window), 0.6, 1.0] {
                let r = |order| residual(&levels, &weyl, &all_terms(&shape, s, order), window, s);
                println!("{file} {window:?} s {s:.4}: fluct {:.5} leading {:.5} next {:.5}",
                    residual(&levels, &weyl, &[], window, s), r(Order::Leading), r(Order::Next));
            }
        }
    }
}
