//! Orbit counts of the stadium.

use orbitsum::billiard::*;
use orbitsum::orbit::*;
use std::f64::consts::PI;

/// Stadium.
#[allow(unreachable_pub)]
pub fn stadium() -> Domain {
    let line = |a: [f64; 2], b: [f64; 2]| {
        Wall::new(
            Shape::Line(Line {
                start: Vec2::new(a[0], a[1]),
                end: Vec2::new(b[0], b[1]),
            }),
            Condition::Dirichlet,
        )
    };
    let arc = |c: f64, from: f64| {
        Wall::new(
            Shape::Arc(Arc {
                center: Vec2::new(c, 0.0),
                radius: 1.0,
                from,
                sweep: PI,
            }),
            Condition::Dirichlet,
        )
    };
    Domain::new(vec![(
        Role::Outer,
        vec![
            line([-1.0, -1.0], [1.0, -1.0]),
            arc(1.0, -PI / 2.0),
            line([1.0, 1.0], [-1.0, 1.0]),
            arc(-1.0, PI / 2.0),
        ],
    )])
    .expect("a stadium")
}

#[test]
fn counts() {
    let domain = stadium();
    let symmetry = detect(&domain);
    for (length, bounces) in [(10.0, 12), (10.0, 20), (12.0, 12), (12.0, 20)] {
        let start = std::time::Instant::now();
        let catalogue = Catalogue::find(
            &domain,
            &symmetry,
            Limits {
                max_length: length,
                max_bounces: bounces,
            },
        );
        println!("{:?}", start.elapsed());
        for pass in &catalogue.passes {
            println!("{pass:?}");
        }
        let count = catalogue
            .orbits
            .iter()
            .filter(|o| o.kind != OrbitKind::Joint)
            .count();
        println!(
            "{length} {bounces}: {count} {} partner2 {}",
            catalogue.orbits.len(),
            catalogue.orbits.iter().filter(|o| o.partner == 2).count()
        );
        for partner in [1u8, 2] {
            let on = |o: &&Orbit| {
                o.points
                    .iter()
                    .any(|p| p.point.x.abs() < 1e-9 || p.point.y.abs() < 1e-9)
            };
            let ony = |o: &&Orbit| o.points.iter().any(|p| p.point.x.abs() < 1e-9);
            let onx = |o: &&Orbit| o.points.iter().any(|p| p.point.y.abs() < 1e-9);
            let center = |o: &&Orbit| {
                (0..o.points.len()).any(|i| {
                    let p = o.points[i];
                    (p.point.x * p.direction.y - p.point.y * p.direction.x).abs() < 1e-9
                })
            };
            let v: Vec<Orbit> = catalogue
                .orbits
                .iter()
                .filter(|o| o.kind == OrbitKind::Isolated && o.partner == partner)
                .cloned()
                .collect();
            println!(
                "STAT {length} {bounces} partner {partner}: {} onaxis {} x0 {} y0 {} center {} twice-copies {:?}",
                v.len(),
                v.iter().filter(on).count(),
                v.iter().filter(ony).count(),
                v.iter().filter(onx).count(),
                v.iter().filter(center).count(),
                [1, 2, 4].map(|c| v.iter().filter(|o| o.copies == c).count())
            );
            let same: Vec<String> = v
                .windows(2)
                .filter(|w| (w[0].length - w[1].length).abs() < 1e-8)
                .map(|w| format!("{:.6}", w[0].length))
                .collect();
            println!("STAT same {same:?}");
        }
        if length == 10.0 {
            for orbit in catalogue.orbits.iter() {
                println!(
                    "{} {:.9} n={} tr={:.4} det-1={:.1e} mu={:?} {:?} p{} g={} copies={} res={:.1e}",
                    orbit.word,
                    orbit.length,
                    orbit.bounces(),
                    orbit.trace(),
                    orbit.monodromy.determinant() - 1.0,
                    orbit.index(),
                    orbit.kind,
                    orbit.partner,
                    symmetry.elements[orbit.symmetry].name,
                    orbit.copies,
                    orbit.residual
                );
            }
        }
    }
}
