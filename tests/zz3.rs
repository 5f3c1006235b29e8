//! scratch
#![allow(unreachable_pub, missing_docs)]
use orbitsum::billiard::*;
use orbitsum::orbit::*;
use orbitsum::trace::*;
use std::f64::consts::PI;
#[path = "stadium_orbits.rs"]
mod st;
fn line(a: [f64; 2], b: [f64; 2]) -> Wall {
    Wall::new(
        Shape::Line(Line {
            start: Vec2::new(a[0], a[1]),
            end: Vec2::new(b[0], b[1]),
        }),
        Condition::Dirichlet,
    )
}
fn quarter() -> Domain {
    Domain::new(vec![(
        Role::Outer,
        vec![
            line([0., 0.], [2., 0.]),
            Wall::new(
                Shape::Arc(Arc {
                    center: Vec2::new(1., 0.),
                    radius: 1.0,
                    from: 0.0,
                    sweep: PI / 2.0,
                }),
                Condition::Dirichlet,
            ),
            line([1., 1.], [0., 1.]),
            line([0., 1.], [0., 0.]),
        ],
    )])
    .unwrap()
}
fn polygon(p: &[[f64; 2]]) -> Domain {
    let n = p.len();
    Domain::new(vec![(
        Role::Outer,
        (0..n).map(|i| line(p[i], p[(i + 1) % n])).collect(),
    )])
    .unwrap()
}
fn resid(
    domain: &Domain,
    class: Option<&str>,
    levels: &[f64],
    window: (f64, f64),
    s: f64,
    lim: Limits,
    verbose: bool,
) -> f64 {
    let sym = detect(domain);
    let irrep = class.map(|c| sym.class(c).expect("class"));
    let t0 = std::time::Instant::now();
    let cat = Catalogue::find(domain, &sym, lim);
    let dt = t0.elapsed();
    if verbose {
        println!(
            "T {} {:?} passes {:?} flat {:?}",
            sym.name, dt, cat.passes, cat.flat_passes
        );
        for st in &cat.strips {
            println!(
                "T strip {} L={:.6} w={:.6} sign={} g={} p{} edges {:?}",
                st.word,
                st.length,
                st.width,
                st.sign,
                sym.elements[st.symmetry].name,
                st.partner,
                st.edges
            );
        }
        for o in cat.orbits.iter().take(12) {
            println!(
                "T orbit {} L={:.6} tr={:.4} {:?} p{} K{:?} chain {:?} cl {:?}",
                o.word,
                o.length,
                o.trace(),
                o.kind,
                o.partner,
                o.fixed_by,
                o.chain,
                o.closures.iter().take(2).collect::<Vec<_>>()
            );
        }
        println!("T orbits {} strips {}", cat.orbits.len(), cat.strips.len());
    }
    let terms = terms(&cat, &ClassWeights::new(&sym, irrep));
    let w = orbitsum::baseline::weyl(domain, &sym, irrep);
    let n = 2000;
    let pts: Vec<f64> = (0..n)
        .map(|i| window.0 + (window.1 - window.0) * i as f64 / (n - 1) as f64)
        .collect();
    let sum = sum_at(&terms, &pts, s);
    let st = orbitsum::levels::staircase(levels, &pts, s);
    let r: f64 = pts
        .iter()
        .enumerate()
        .map(|(i, &k)| {
            let d = st[i] - w.count(k, s) - sum.staircase[i];
            d * d
        })
        .sum::<f64>()
        / n as f64;
    let f: f64 = pts
        .iter()
        .enumerate()
        .map(|(i, &k)| {
            let d = st[i] - w.count(k, s);
            d * d
        })
        .sum::<f64>()
        / n as f64;
    println!("T fluct {:.5} resid {:.3e}", f.sqrt(), r.sqrt());
    r.sqrt()
}
#[test]
fn quarter_stadium() {
    let list = orbitsum::levels::read(std::path::Path::new("data/quarter-stadium.csv")).unwrap();
    for (sp) in [2.8, 2.0, 1.3] {
        let s = sp * 4.0 * PI / (2.0 * quarter().area * 25.0);
        let l = Limits {
            max_length: 12.0,
            max_bounces: 24,
        };
        println!("T spacing {sp} s {s:.4}");
        resid(&quarter(), None, &list.values, (8.0, 42.0), s, l, sp == 2.8);
        resid(
            &st::stadium(),
            Some("odd,odd"),
            &list.values,
            (8.0, 42.0),
            s,
            Limits {
                max_length: 12.0,
                max_bounces: 20,
            },
            sp == 2.8,
        );
    }
}
#[test]
fn rectangle() {
    let (a, b) = (1.0, 1.3);
    let mut lv = vec![];
    for m in 1..60 {
        for n in 1..80 {
            let k = PI * ((m as f64 / a).powi(2) + (n as f64 / b).powi(2)).sqrt();
            if k < 70.0 {
                lv.push(k);
            }
        }
    }
    lv.sort_by(f64::total_cmp);
    let d = polygon(&[[0., 0.], [a, 0.], [a, b], [0., b]]);
    let s = 0.5;
    resid(
        &d,
        None,
        &lv,
        (15.0, 45.0),
        s,
        Limits {
            max_length: 13.0,
            max_bounces: 100,
        },
        true,
    );
    let d = polygon(&[[0., 0.], [1., 0.], [0., 1.]]);
    let mut lv = vec![];
    for m in 1..60 {
        for n in 1..m {
            let k = PI * ((m * m + n * n) as f64).sqrt();
            if k < 70.0 {
                lv.push(k);
            }
        }
    }
    lv.sort_by(f64::total_cmp);
    resid(
        &d,
        None,
        &lv,
        (15.0, 45.0),
        s,
        Limits {
            max_length: 13.0,
            max_bounces: 100,
        },
        true,
    );
    let d = polygon(&[[0., 0.], [1., 0.], [0.5, 0.75f64.sqrt()]]);
    let mut lv = vec![];
    for m in 1..60 {
        for n in 1..60 {
            let k = 4.0 * PI / 3.0 * ((m * m + n * n + m * n) as f64).sqrt();
            if k < 70.0 {
                lv.push(k);
            }
        }
    }
    lv.sort_by(f64::total_cmp);
    resid(
        &d,
        None,
        &lv,
        (15.0, 45.0),
        s,
        Limits {
            max_length: 13.0,
            max_bounces: 100,
        },
        true,
    );
}
