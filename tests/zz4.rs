//! scratch
#![allow(unreachable_pub, missing_docs)]
use orbitsum::billiard::*;
use orbitsum::orbit::*;
#[path = "stadium_orbits.rs"]
mod st;
#[test]
fn zz() {
    let domain = st::stadium();
    let sym = detect(&domain);
    for (l, n) in [(10.0, 12), (10.0, 20), (12.0, 12), (12.0, 20)] {
        let cat = Catalogue::find(
            &domain,
            &sym,
            Limits {
                max_length: l,
                max_bounces: n,
            },
        );
        let mut upto = 0;
        let mut names = std::collections::BTreeMap::new();
        let mut inv = 0;
        let mut fixb = 0;
        for o in &cat.orbits {
            if o.kind == OrbitKind::Joint || o.kind == OrbitKind::Axis {
                continue;
            }
            let end = sym.apply(o.symmetry, o.points[0].point);
            let m = o.points.len();
            let rev = (
                if m > 1 { o.points[1].point } else { end },
                -o.points[0].direction,
            );
            let mut full = vec![];
            let mut g = 0;
            for _ in 0..4 {
                for p in &o.points {
                    full.push((sym.apply(g, p.point), sym.turn(g, p.direction)));
                }
                g = sym.product[o.symmetry][g];
            }
            let strict = full
                .iter()
                .any(|p| (p.0 - rev.0).norm() < 1e-6 && (p.1 - rev.1).norm() < 1e-6);
            if o.partner == 1 && !strict {
                upto += 1;
            }
            // set-wise symmetric under h (stabiliser of full orbit incl reversal)
            let stab: Vec<usize> = (0..4)
                .filter(|&h| {
                    full.iter().any(|p| {
                        (sym.apply(h, p.0) - full[0].0).norm() < 1e-6
                            && (sym.turn(h, p.1) - full[0].1).norm() < 1e-6
                    })
                })
                .collect();
            let rstab: Vec<usize> = (0..4)
                .filter(|&h| {
                    full.iter().any(|p| {
                        (sym.apply(h, p.0) - rev.0).norm() < 1e-6
                            && (sym.turn(h, p.1) - rev.1).norm() < 1e-6
                    })
                })
                .collect();
            *names
                .entry(format!(
                    "g={} stab{:?} rstab{:?}",
                    sym.elements[o.symmetry].name, stab, rstab
                ))
                .or_insert(0) += 1;
            if stab.len() == 4 {
                inv += 1;
            }
            if full.iter().any(|p| p.0.y.abs() < 1e-9) {
                fixb += 1;
            }
        }
        println!("T {l} {n}: upto {upto} inv {inv} fixb {fixb}");
        for (k, v) in names {
            println!("T   {k}: {v}");
        }
    }
}
