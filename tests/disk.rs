//! Disk against Bessel zeros (data/reference/disk_*.csv, scipy 1.17.1 and mpmath 1.4.1).

#[allow(dead_code)]
mod integrable;

use integrable::{Order, Weyl, all_terms, levels, residual};
use orbitsum::billiard::Condition;
use orbitsum::orbit::tori::Integrable;
use std::f64::consts::PI;

const WINDOWS: [(f64, f64); 3] = [(20.0, 30.0), (30.0, 45.0), (45.0, 60.0)];

#[test]
fn measure() {
    for (condition, file) in [(Condition::Dirichlet, "disk_d.csv"), (Condition::Neumann, "disk_n.csv")] {
        let d = condition == Condition::Dirichlet;
        let weyl = Weyl {
            area: PI,
            length: if d { 2.0 * PI } else { -2.0 * PI },
            constant: 1.0 / 6.0,
            inverse_k: if d { 1.0 } else { 5.0 } / 128.0,
        };
        let levels = levels(file);
        let shape = Integrable::Disk { radius: 1.0, condition };
        for window in WINDOWS {
            for s in [weyl.spacings(2.0, window), 0.25, 0.5] {
                let r = |order| residual(&levels, &weyl, &all_terms(&shape, s, order), window, s);
                println!("{file} {window:?} s {s:.4}: fluct {:.5} leading {:.5} next {:.5}",
                    residual(&levels, &weyl, &[], window, s), r(Order::Leading), r(Order::Next));
            }
        }
    }
}
