//! scratch
use orbitsum::{billiard::*, orbit::*, system};
fn main() {
    let args: Vec<String> = std::env::args().collect();
    let length: f64 = args[2].parse().unwrap();
    let bounces: usize = args[3].parse().unwrap();
    for f in std::fs::read_dir("billiards").unwrap() {
        let p = f.unwrap().path();
        if args[1] != "all" && !p.to_string_lossy().contains(&args[1]) {
            continue;
        }
        let s = system::load(&p, &[]).map_err(|e| e.render()).unwrap();
        let sym = detect(&s.domain);
        let scale = if args[1] == "all" {
            s.domain.area.sqrt()
        } else {
            1.0
        };
        let t0 = std::time::Instant::now();
        let c = Catalogue::find(
            &s.domain,
            &sym,
            Limits {
                max_length: length * scale,
                max_bounces: bounces,
            },
        );
        println!(
            "{} {} {:?} Lmax {:.2} orbits {} strips {} tori {} passes {:?} flat {:?}",
            s.name,
            sym.name,
            t0.elapsed(),
            length * scale,
            c.orbits.len(),
            c.strips.len(),
            c.tori.terms.len(),
            c.passes
                .iter()
                .map(|p| (p.sources, p.rays, p.added))
                .collect::<Vec<_>>(),
            c.flat_passes
                .iter()
                .map(|p| (p.sources, p.rays, p.added))
                .collect::<Vec<_>>()
        );
        for o in &c.omissions {
            println!(
                "    omission {} x{} L={:.3} size(20)={:.4}",
                o.kind,
                o.count,
                o.length,
                o.size_at(20.0, 0.0)
            );
        }
        let worst = c
            .orbits
            .iter()
            .map(|o| (o.monodromy.determinant() - 1.0).abs())
            .fold(0.0, f64::max);
        let wr = c.orbits.iter().map(|o| o.residual).fold(0.0, f64::max);
        println!(
            "    det {:.1e} residual {:.1e} p2 {} elliptic {}",
            worst,
            wr,
            c.orbits.iter().filter(|o| o.partner == 2).count(),
            c.orbits.iter().filter(|o| o.trace().abs() < 2.0).count()
        );
        if args.len() > 4 {
            for o in c.orbits.iter().take(args[4].parse().unwrap()) {
                println!(
                    "   {} {:.9} n={} tr={:.4} mu={:?} {:?} p{} g={} copies={} res={:.1e}",
                    o.word,
                    o.length,
                    o.bounces(),
                    o.trace(),
                    o.index(),
                    o.kind,
                    o.partner,
                    sym.elements[o.symmetry].name,
                    o.copies,
                    o.residual
                );
            }
        }
    }
}
