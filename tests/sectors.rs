//! Circular sectors of radius 1 against zeros of Bessel functions of integer and fractional order (data/reference/disk_*.csv
//! and sector_*.csv, from scipy 1.17.1 and mpmath 1.4.1).

#[allow(
    dead_code,
    reason = "each file of checks uses its own part of what they share"
)]
mod integrable;

use integrable::Smoothing::{Spacings, Width};
use integrable::{Case, Weyl, bounds, levels, levels_of_orders};
use orbitsum::billiard::Condition::{self, Dirichlet, Neumann};
use orbitsum::billiard::{Arc, Domain, Line, Role, Shape, Vec2, Wall};
use orbitsum::orbit::tori::{Integrable, recognise};
use std::f64::consts::{FRAC_PI_2, PI};

const DD: [Condition; 2] = [Dirichlet, Dirichlet];
const DN: [Condition; 2] = [Dirichlet, Neumann];
const NN: [Condition; 2] = [Neumann, Neumann];

/// Corner constant of the smooth count (Stewartson & Waechter 1971; Baltes & Hilf, Spectra of Finite Systems, 1976).
fn corner(a: Condition, b: Condition, angle: f64) -> f64 {
    if a == b {
        (PI * PI - angle * angle) / (24.0 * PI * angle)
    } else {
        -(PI * PI + 2.0 * angle * angle) / (48.0 * PI * angle)
    }
}

fn sector<'a>(
    name: &'a str,
    opening: f64,
    arc: Condition,
    radial: [Condition; 2],
    levels: Vec<f64>,
) -> Case<'a> {
    // 1/k: curvature^2, and the right-angled corners between arc and radial walls.
    let (bend, ends) = if arc == Dirichlet {
        (1.0, 1.0)
    } else {
        (5.0, -3.0)
    };
    let signs = radial[0].sign() + radial[1].sign();
    Case {
        name,
        shape: Integrable::Sector {
            radius: 1.0,
            opening,
            arc,
            radial,
        },
        levels,
        weyl: Weyl {
            area: 0.5 * opening,
            length: -arc.sign() * opening - signs,
            constant: opening / (12.0 * PI)
                + corner(radial[0], radial[1], opening)
                + corner(radial[0], arc, FRAC_PI_2)
                + corner(radial[1], arc, FRAC_PI_2),
            inverse_k: bend * opening / (256.0 * PI) - ends * signs / (32.0 * PI),
        },
    }
}

#[test]
fn half_disk() {
    // Measured with next order: 0.0013, 0.0043, 0.0055 for all three.
    let expected = bounds(
        Spacings(2.0),
        [(0.016, 0.0015), (0.034, 0.0047), (0.068, 0.006)],
    );
    sector(
        "half disk DD",
        PI,
        Dirichlet,
        DD,
        levels_of_orders("disk_d.csv", |m| m > 0),
    )
    .check(&expected);
    sector(
        "half disk NN",
        PI,
        Dirichlet,
        NN,
        levels_of_orders("disk_d.csv", |_| true),
    )
    .check(&expected);
    sector(
        "half disk D/N",
        PI,
        Dirichlet,
        DN,
        levels("sector_pi_dn.csv"),
    )
    .check(&expected);
}

#[test]
fn quarter_disk() {
    // Measured with next order: 0.0017, 0.0032, 0.0092 for all three.
    let expected = bounds(
        Spacings(2.0),
        [(0.0095, 0.0019), (0.019, 0.0036), (0.023, 0.0101)],
    );
    let even = |m: u32| m.is_multiple_of(2);
    let quarter = FRAC_PI_2;
    sector(
        "quarter disk DD",
        quarter,
        Dirichlet,
        DD,
        levels_of_orders("disk_d.csv", |m| m > 0 && even(m)),
    )
    .check(&expected);
    sector(
        "quarter disk NN",
        quarter,
        Dirichlet,
        NN,
        levels_of_orders("disk_d.csv", even),
    )
    .check(&expected);
    sector(
        "quarter disk D/N",
        quarter,
        Dirichlet,
        DN,
        levels_of_orders("disk_d.csv", |m| !even(m)),
    )
    .check(&expected);
}

#[test]
fn opening_two() {
    // Measured with next order: DD 0.0033, 0.0043, 0.0065; D/N 0.0035, 0.0043, 0.0069. Without the phase of next order of
    // the diffraction at the centre all six are 0.010.
    let expected = bounds(
        Spacings(2.0),
        [(0.014, 0.0038), (0.03, 0.0048), (0.042, 0.0076)],
    );
    sector(
        "sector 2 DD",
        2.0,
        Dirichlet,
        DD,
        levels("sector_two_dd.csv"),
    )
    .check(&expected);
    sector(
        "sector 2 D/N",
        2.0,
        Dirichlet,
        DN,
        levels("sector_two_dn.csv"),
    )
    .check(&expected);
}

#[test]
fn neumann_arc() {
    // Measured: half disks 0.0054 to 0.0036 / 0.0025 to 0.0028.
    let expected = bounds(
        Width(0.5),
        [(0.0063, 0.0028), (0.0053, 0.0029), (0.0042, 0.003)],
    );
    sector(
        "half disk DD, arc N",
        PI,
        Neumann,
        DD,
        levels_of_orders("disk_n.csv", |m| m > 0),
    )
    .check(&expected);
    sector(
        "half disk NN, arc N",
        PI,
        Neumann,
        NN,
        levels_of_orders("disk_n.csv", |_| true),
    )
    .check(&expected);
}

#[test]
fn drawn_half_disk_is_the_sector() {
    let center = Vec2::new(0.0, 0.0);
    let arc = Shape::Arc(Arc {
        center,
        radius: 1.0,
        from: 0.0,
        sweep: PI,
    });
    let diameter = Shape::Line(Line {
        start: Vec2::new(-1.0, 0.0),
        end: Vec2::new(1.0, 0.0),
    });
    let walls = vec![Wall::new(arc, Dirichlet), Wall::new(diameter, Neumann)];
    let domain = Domain::new(vec![(Role::Outer, walls)]).expect("half disk");
    let mut case = sector(
        "drawn half disk NN",
        PI,
        Dirichlet,
        NN,
        levels_of_orders("disk_d.csv", |_| true),
    );
    case.shape = recognise(&domain).expect("integrable");
    case.check(&bounds(
        Spacings(2.0),
        [(0.016, 0.0015), (0.034, 0.0047), (0.068, 0.006)],
    ));
}
