//! Scratch.
#![allow(unreachable_pub, missing_docs)]
use orbitsum::billiard::*;
use orbitsum::orbit::*;
use std::f64::consts::PI;
#[path = "stadium_orbits.rs"]
#[allow(unreachable_pub)]
mod st;
fn run(tr: &Tracer, s: f64, phi: f64, nmax: usize) -> Option<Vec<(Vec2, Vec2, f64, Mat2, usize)>> {
    // start on right arc at angle s
    let r = Vec2::new(s.cos(), s.sin());
    let n = -r;
    let t = Vec2::new(-r.y, r.x);
    let d = n * phi.cos() + t * phi.sin();
    let mut ray = Ray {
        point: Vec2::new(1.0, 0.0) + r,
        direction: d,
        origin: Origin::Wall {
            wall: 1,
            t: s + PI / 2.0,
        },
    };
    let mut out = vec![];
    let mut len = 0.0;
    let mut m = Mat2::identity();
    for _ in 0..nmax {
        let Event::Wall(h) = tr.next(&ray) else {
            return None;
        };
        len += h.distance;
        m = reflection(h.curvature, incidence(ray.direction, &h)) * flight(h.distance) * m;
        ray = Tracer::reflect(ray.direction, &h);
        out.push((h.point, ray.direction, len, m, h.wall));
    }
    Some(out)
}
#[test]
fn brute() {
    let domain = st::stadium();
    let sym = detect(&domain);
    let tr = Tracer::new(&domain);
    let cat = Catalogue::find(
        &domain,
        &sym,
        Limits {
            max_length: 10.0,
            max_bounces: 12,
        },
    );
    let mut seen: Vec<(usize, f64, Vec<(Vec2, Vec2)>)> = vec![];
    let ns = 600;
    let np = 1500;
    for i in 0..ns {
        for j in 0..np {
            let s0 = PI / 2.0 * (i as f64 + 0.37) / ns as f64;
            let p0 = -PI / 2.0 + PI * (j as f64 + 0.41) / np as f64;
            let Some(tk) = run(&tr, s0, p0, 12) else {
                continue;
            };
            for n in 1..=12 {
                let x = &tk[n - 1];
                if x.2 > 10.2 {
                    break;
                }
                if x.4 % 2 == 0 {
                    continue;
                }
                for g in 0..4 {
                    let gi = sym.inverse(g);
                    let p = sym.apply(gi, x.0);
                    let st = Vec2::new(1.0 + s0.cos(), s0.sin());
                    if (p - st).norm() > 0.1 {
                        continue;
                    }
                    let (mut s, mut phi) = (s0, p0);
                    let mut ok = false;
                    let mut last = None;
                    for _ in 0..10 {
                        let Some(tk) = run(&tr, s, phi, n) else { break };
                        let x = &tk[n - 1];
                        if x.4 % 2 == 0 {
                            break;
                        }
                        let p = sym.apply(gi, x.0);
                        let d = sym.turn(gi, x.1);
                        if p.x < 1.0 - 0.3 {
                            break;
                        }
                        let s1 = (p.y).atan2(p.x - 1.0);
                        let nn = -Vec2::new(s1.cos(), s1.sin());
                        let t1 = Vec2::new(-s1.sin(), s1.cos());
                        let phi1 = d.dot(&t1).atan2(d.dot(&nn));
                        // coordinates y = s cos(phi), angle = phi + s (global direction angle)
                        let c = phi.cos();
                        let mism = Vec2::new(-(s1 - s) * c, (s1 - s) - (phi1 - phi));
                        if mism.norm() < 1e-11 {
                            ok = true;
                            last = Some((x.2, tk.clone()));
                            break;
                        }
                        let m = x.3 * sym.elements[g].det();
                        let Some(inv) = (Mat2::identity() - m).try_inverse() else {
                            break;
                        };
                        let dx = inv * mism;
                        let ds = -dx.x / c;
                        s += ds;
                        phi += ds - dx.y;
                        if s.abs() > 1.6 || phi.abs() > 1.57 {
                            break;
                        }
                    }
                    if !ok {
                        continue;
                    }
                    let (l, tk) = last.unwrap();
                    if l > 10.0 + 1e-9 {
                        continue;
                    }
                    // primitive
                    let start = (
                        Vec2::new(1.0 + s.cos(), s.sin()),
                        -Vec2::new(s.cos(), s.sin()) * phi.cos()
                            + Vec2::new(-s.sin(), s.cos()) * phi.sin(),
                    );
                    let same = |a: (Vec2, Vec2), b: (Vec2, Vec2)| {
                        (0..4).any(|h| {
                            (sym.apply(h, a.0) - b.0).norm() < 1e-6
                                && (sym.turn(h, a.1) - b.1).norm() < 1e-6
                        })
                    };
                    if (0..n - 1).any(|k| same(start, (tk[k].0, tk[k].1))) {
                        continue;
                    }
                    let mut pts = vec![start];
                    for k in 0..n - 1 {
                        pts.push((tk[k].0, tk[k].1));
                    }
                    let rev: Vec<(Vec2, Vec2)> = (0..n)
                        .map(|k| (tk[k].0, -(if k == 0 { start.1 } else { tk[k - 1].1 })))
                        .collect();
                    if seen.iter().any(|o| {
                        o.0 == n
                            && (o.1 - l).abs() < 1e-8
                            && (o.2.iter().any(|q| same(*q, start) || same(*q, rev[0])))
                    }) {
                        continue;
                    }
                    let inours = cat.orbits.iter().any(|o| {
                        o.bounces() == n
                            && (o.length - l).abs() < 1e-8
                            && o.points.iter().any(|q| {
                                same((q.point, q.direction), start)
                                    || same((q.point, q.direction), rev[0])
                            })
                    });
                    if !inours {
                        println!(
                            "MISSING n={n} L={l:.9} s={s:.6} phi={phi:.6} g={} walls={:?} tr={}",
                            sym.elements[g].name,
                            tk.iter().map(|x| x.4 + 1).collect::<Vec<_>>(),
                            tk[n - 1].3.trace()
                        );
                        for q in &pts {
                            println!("   {:.6},{:.6}", q.0.x, q.0.y);
                        }
                    }
                    seen.push((n, l, pts));
                }
            }
        }
    }
    println!("brute {} ours {}", seen.len(), cat.orbits.len());
    seen.sort_by(|a, b| a.1.total_cmp(&b.1));
}
