//! Directly computed levels of a billiard.

mod dense;
mod dissection;
mod elements;
mod estimate;
mod factor;
mod fields;
mod lanczos;
mod mesh;
mod space;

pub use mesh::MeshError;

use crate::billiard::{Domain, Irrep, Symmetry};

/// trial
pub fn trial(
    domain: &Domain,
    symmetry: &Symmetry,
    class: Option<&Irrep>,
    degree: usize,
    kh: f64,
    [from, to]: [f64; 2],
) -> Result<Vec<[f64; 2]>, MeshError> {
    let clock = std::time::Instant::now();
    let (cell, fields) = fields::cell_and_fields(domain, symmetry, class);
    let mesh = mesh::Mesh::new(&cell, kh / to)?;
    eprintln!("mesh {} triangles, {} curved, {:?}", mesh.triangles.len(), mesh.triangles.iter().filter(|t| !mesh.is_straight(t)).count(), clock.elapsed());
    let space = space::Space::new(&mesh, &cell, &fields, degree, 0);
    eprintln!("space {} {:?}", space.size, clock.elapsed());
    let tree = dissection::Dissection::new(&space, &mesh);
    eprintln!("tree {} {:?}", tree.nodes.iter().map(|n| n.eliminated.len()+n.rim.len()).max().unwrap_or(0), clock.elapsed());
    let (a, b) = (from * from, to * to);
    let low = factor::count_below(&space, &tree, a);
    let high = factor::count_below(&space, &tree, b);
    eprintln!("counts {low} {high} {:?}", clock.elapsed());
    let shift = 0.5 * (a + b);
    let factor = factor::Factor::new(&space, &tree, shift);
    eprintln!("factor {:?}", clock.elapsed());
    let pairs = lanczos::pairs_near(&space, &factor, shift, &lanczos::Wanted { from: a, to: b, expected: high - low, accuracy: 1e-12 });
    eprintln!("lanczos {} {} {:?}", pairs.values.len(), pairs.converged, clock.elapsed());
    let est = estimate::Estimator::new(&space, &mesh, &cell, &fields, degree);
    eprintln!("estimator {:?}", clock.elapsed());
    let (values, errors) = est.assess(&space, &pairs.vectors);
    eprintln!("errors {:?}", clock.elapsed());
    let rem = pairs.remainders.iter().fold(0.0_f64, |a, b| a.max(*b));
    eprintln!("largest remainder {rem:e}");
    Ok(values.iter().zip(errors).zip(&pairs.remainders).map(|((e, d), r)| [e.sqrt(), (d + r) / (2.0 * e.sqrt())]).collect())
}

/// trial
pub fn trial_mesh(domain: &Domain, symmetry: &Symmetry, class: Option<&Irrep>, h: f64) {
    let (cell, _) = fields::cell_and_fields(domain, symmetry, class);
    let mesh = match mesh::Mesh::new(&cell, h) { Ok(m) => m, Err(e) => { eprintln!("{e}"); return } };
    let s = 400.0 / cell.size;
    println!("<svg xmlns='http://www.w3.org/2000/svg' width='900' height='900' viewBox='-450 -450 900 900'>");
    for t in &mesh.triangles {
        let mut d = String::new();
        for (a, b) in [([0.0, 0.0], [1.0, 0.0]), ([1.0, 0.0], [0.0, 1.0]), ([0.0, 1.0], [0.0, 0.0])] {
            for i in 0..=8 {
                let f = f64::from(i) / 8.0;
                let p = mesh.map(t, [a[0] * (1.0 - f) + b[0] * f, a[1] * (1.0 - f) + b[1] * f])[0];
                d += &format!("{}{:.3},{:.3} ", if d.is_empty() { "M" } else { "L" }, p.x * s, -p.y * s);
            }
        }
        println!("<path d='{d}' fill='none' stroke='black' stroke-width='0.7'/>");
    }
    let area: f64 = mesh.triangles.iter().map(|t| { let p = t.points; 0.5 * crate::billiard::cross(p[1] - p[0], p[2] - p[0]) }).sum();
    println!("</svg>");
    eprintln!("chord area {area} cell {} triangles {}", cell.area, mesh.triangles.len());
}

/// trial
pub fn trial_dense(domain: &Domain, symmetry: &Symmetry, class: Option<&Irrep>, degree: usize, h: f64) {
    let (cell, fields) = fields::cell_and_fields(domain, symmetry, class);
    let mesh = mesh::Mesh::new(&cell, h).expect("mesh");
    let space = space::Space::new(&mesh, &cell, &fields, degree, 0);
    let n = space.size;
    let mut k = dense::Matrix::zeros(n, n);
    for leaf in &space.leaves {
        let e = &space.elements[leaf.element];
        let m = e.matrices.combine(&space.reference, &e.selection, 1.0, 0.0);
        let (v, _) = dense::eigen(&m);
        if v[0] < -1e-9 { println!("leaf {} lowest {:e} quality {}", leaf.element, v[0], mesh.triangles[leaf.element].quality); }
        for a in &leaf.entries { for b in &leaf.entries {
            k[(leaf.unknowns[a.slot], leaf.unknowns[b.slot])] += a.coefficient * b.coefficient * m[(a.local, b.local)];
        } }
    }
    let (v, _) = dense::eigen(&k);
    println!("size {n} lowest {:?} negative {}", &v[..5], dense::Symmetric::new(k.as_ref()).negative());
    let tree = dissection::Dissection::new(&space, &mesh);
    let total: usize = tree.nodes.iter().map(|n| n.eliminated.len()).sum();
    println!("tree eliminates {total}, count {}", factor::count_below(&space, &tree, 0.0));
    for node in &tree.nodes {
        let s = dense::Matrix::from_fn(node.eliminated.len(), node.eliminated.len(), |i, j| k[(node.eliminated[i], node.eliminated[j])]);
        let (v, _) = dense::eigen(&s);
        let neg = dense::Symmetric::new(s.as_ref()).negative();
        if neg > 0 { println!("n {} lowest {:?} neg {neg}", s.nrows(), v.first()); println!("{s:?}"); break; }
    }
}
