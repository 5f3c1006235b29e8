//! Ellipse.

#[allow(dead_code)]
mod integrable;

use integrable::{Order, Weyl, all_terms, levels, residual};
use orbitsum::billiard::Condition::{Dirichlet, Neumann};
use orbitsum::orbit::tori::{FamilyKind, Integrable};
use std::f64::consts::PI;

const WINDOWS: [(f64, f64); 3] = [(10.0, 18.0), (18.0, 28.0), (28.0, 38.0)];

fn weyl(b: f64, condition: orbitsum::billiard::Condition) -> Weyl {
    let n = 4000;
    let (mut length, mut squared) = (0.0, 0.0);
    for i in 0..n {
        let t = 2.0 * PI * i as f64 / n as f64;
        let speed = (t.sin().powi(2) + b * b * t.cos().powi(2)).sqrt();
        length += speed * 2.0 * PI / n as f64;
        squared += b * b / speed.powi(5) * 2.0 * PI / n as f64;
    }
    let d = condition == Dirichlet;
    Weyl { area: PI * b, length: if d { length } else { -length }, constant: 1.0 / 6.0, inverse_k: squared / (256.0 * PI) * if d { 1.0 } else { 5.0 } }
}

#[test]
fn measure() {
    for (b, condition, file) in [(0.8, Dirichlet, "ellipse_8_d.csv"), (0.6, Dirichlet, "ellipse_6_d.csv"), (0.8, Neumann, "ellipse_8_n.csv")] {
        let weyl = weyl(b, condition);
        let levels = levels(file);
        let shape = Integrable::Ellipse { long: 1.0, short: b, condition };
        for window in WINDOWS {
            for s in [weyl.spacings(2.0, window), 0.5, 1.0] {
                let sum = orbitsum::orbit::tori::terms(&shape, &orbitsum::orbit::tori::TorusLimits::up_to(5.0 / s));
                let full = residual(&levels, &weyl, &sum.terms, window, s);
                let without = |kind: FamilyKind| {
                    let t: Vec<_> = sum.terms.iter().zip(&sum.families).filter(|(_, f)| f.kind != kind).map(|(t, _)| *t).collect();
                    residual(&levels, &weyl, &t, window, s)
                };
                println!("{file} {window:?} s {s:.4}: fluct {:.5} all {:.5} without rot {:.4} lib {:.4} short {:.4} long {:.4}", residual(&levels, &weyl, &[], window, s), full,
                  without(FamilyKind::Rotation), without(FamilyKind::Libration), without(FamilyKind::ShortAxis), without(FamilyKind::LongAxis));
            }
        }
    }
    let _ = all_terms; let _ = Order::Next;
}
