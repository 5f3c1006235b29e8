//! Sectors.

#[allow(dead_code)]
mod integrable;

use integrable::{Order, Weyl, all_terms, levels, residual};
use orbitsum::billiard::Condition::{self, Dirichlet, Neumann};
use orbitsum::orbit::tori::Integrable;
use std::f64::consts::PI;

const WINDOWS: [(f64, f64); 3] = [(20.0, 30.0), (30.0, 45.0), (45.0, 60.0)];

#[test]
fn measure() {
    for (beta, radial, file) in [(2.0, [Dirichlet, Dirichlet], "sector_two_dd.csv"), (2.0, [Dirichlet, Neumann], "sector_two_dn.csv"), (PI, [Dirichlet, Neumann], "sector_pi_dn.csv")] {
        let corner = |a: Condition, b: Condition, angle: f64| if a == b { (PI * PI - angle * angle) / (24.0 * PI * angle) } else { -(PI * PI + 2.0 * angle * angle) / (48.0 * PI * angle) };
        let weyl = Weyl {
            area: 0.5 * beta,
            length: beta - radial[0].sign() - radial[1].sign(),
            constant: beta / (12.0 * PI) + corner(radial[0], radial[1], beta) + corner(radial[0], Dirichlet, PI / 2.0) + corner(radial[1], Dirichlet, PI / 2.0),
            inverse_k: beta / (256.0 * PI) - (radial[0].sign() + radial[1].sign()) / (32.0 * PI),
        };
        let levels = levels(file);
        let shape = Integrable::Sector { radius: 1.0, opening: beta, arc: Dirichlet, radial };
        for window in WINDOWS {
            for s in [weyl.spacings(2.0, window)] {
                let r = |order| residual(&levels, &weyl, &all_terms(&shape, s, order), window, s);
                println!("{file} {window:?} s {s:.4}: fluct {:.5} leading {:.5} next {:.5}",
                    residual(&levels, &weyl, &[], window, s), r(Order::Leading), r(Order::Next));
            }
        }
    }
}
