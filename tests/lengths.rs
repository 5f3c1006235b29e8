//! Length spectra: peaks where closed forms have them and as high, whatever is taken out of one side found on it.
//!
//! Levels of rectangles are closed forms (sine products), the lengths of their orbits 2 sqrt((m a)^2 + (n b)^2) with the amplitudes of
//! Bessel functions (physics of any textbook; "exact" here means by the Poisson sum formula); those of the disk are zeros of
//! Bessel functions (data/reference/disk_d.csv: scipy 1.17.1, mpmath 1.4.1), with orbits of 2 R v sin(pi w/v) (Balian & Bloch,
//! Ann. Phys. 69, 1972).

#[path = "common/exact.rs"]
mod exact;
#[path = "common/shipped.rs"]
mod shipped;
#[path = "common/tables.rs"]
mod tables;

use exact::{box_value, levels as closed_form};
use num_complex::Complex64;
use orbitsum::baseline::weyl;
use orbitsum::billiard::{Domain, detect};
use orbitsum::levels::lengths::{
    Agreement, LengthComparison, LengthInput, LengthSpectrum, Side, Taper,
};
use orbitsum::levels::read;
use orbitsum::orbit::{Catalogue, ClassWeights, Limits, OmissionKind, terms};
use orbitsum::trace::{Amplitude, Term};
use proptest::prelude::*;
use shipped::shape;
use std::f64::consts::PI;
use std::path::Path;
use tables::levels;

/// A shape's orbits and the smallest length at which anything is expected.
struct Orbits {
    domain: Domain,
    catalogue: Catalogue,
    terms: Vec<Term>,
    longest: f64,
}

impl Orbits {
    fn find(domain: Domain, longest: f64) -> Self {
        let symmetry = detect(&domain);
        let catalogue = Catalogue::find(&domain, &symmetry, Limits::up_to(longest, &domain));
        let terms = terms(&catalogue, &ClassWeights::new(&symmetry, None));
        Self {
            domain,
            catalogue,
            terms,
            longest,
        }
    }

    fn spectrum(&self, levels: &[f64], taper: Taper, terms: &[Term]) -> LengthSpectrum {
        let smooth = weyl(&self.domain, &detect(&self.domain), None);
        LengthSpectrum::new(&LengthInput {
            levels,
            errors: None,
            density: &|k| smooth.density(k, 0.0),
            terms,
            taper,
            longest: self.longest,
        })
        .expect("a window that resolves lengths")
    }

    fn shortest(&self) -> f64 {
        let terms = self.terms.iter().map(|term| term.length);
        let omissions = self.catalogue.omissions.iter();
        let left_out = omissions.flat_map(|left_out| &left_out.lengths);
        terms.chain(left_out.copied()).fold(f64::INFINITY, f64::min)
    }

    fn compare(&self, levels: &[f64], taper: Taper) -> LengthComparison {
        self.spectrum(levels, taper, &self.terms)
            .compare(self.shortest(), self.longest)
    }
}

fn rectangle_levels(a: f64, b: f64, end: f64) -> Vec<f64> {
    closed_form(end, box_value(a, b, 0.0, 0.0), |m, n| m >= 1 && n >= 1)
}

fn shipped_levels(name: &str) -> Vec<f64> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join(name);
    read(&path).expect("a shipped list").values
}

/// Numbers between 0 and 1 that are the same in every run (Steele, Lea & Flood, OOPSLA 2014, from memory).
struct Random(u64);

impl Random {
    fn next(&mut self) -> f64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((z ^ (z >> 31)) >> 11) as f64 / (1_u64 << 53) as f64
    }

    /// Normal, by Box and Muller's formula.
    fn normal(&mut self) -> f64 {
        let radius = (-2.0 * (1.0 - self.next()).ln()).sqrt();
        radius * (2.0 * PI * self.next()).cos()
    }
}

/// Levels whose smooth staircase is 10 k + Re[c exp(3 i k)]: it passes half odd numbers at them. What their steps add lies beyond
/// the length 2 pi x 10.
fn levels_of_a_wave(c: Complex64, length: f64, taper: Taper) -> Vec<f64> {
    let staircase = |k: f64| 10.0 * k + (c * Complex64::cis(k * length)).re;
    let first = staircase(taper.from).ceil() as i32;
    let last = staircase(taper.to).floor() as i32;
    (first - 1..=last)
        .map(|n| {
            let (mut low, mut high) = (taper.from - 1.0, taper.to + 1.0);
            for _ in 0..200 {
                let middle = 0.5 * (low + high);
                if staircase(middle) < f64::from(n) + 0.5 {
                    low = middle;
                } else {
                    high = middle;
                }
            }
            low
        })
        .collect()
}

fn wave_spectrum(c: Complex64, length: f64, taper: Taper, terms: &[Term]) -> LengthSpectrum {
    LengthSpectrum::new(&LengthInput {
        levels: &levels_of_a_wave(c, length, taper),
        errors: None,
        density: &|_| 10.0,
        terms,
        taper,
        longest: 9.0,
    })
    .expect("lengths")
}

#[test]
fn a_single_wave_has_a_peak_as_high_as_its_coefficient() {
    let taper = Taper {
        from: 5.0,
        to: 45.0,
    };
    let c = Complex64::from_polar(0.3, 0.7);
    let term = Term {
        length: 3.0,
        coefficient: c,
        amplitude: Amplitude::Constant,
        repetition: 1,
    };
    let spectrum = wave_spectrum(c, 3.0, taper, &[term]);
    for values in [&spectrum.levels, &spectrum.orbits] {
        for (length, value) in spectrum.lengths.iter().zip(values) {
            // Beside the peak the phase turns about the middle of the window, and the height falls as 1/l. What the wave at -3 adds
            // are side lobes.
            let distance = length - 3.0;
            let expected =
                c * Complex64::cis(-distance * 25.0) * taper.response(distance) * 3.0 / *length;
            assert!(
                (value - expected).norm() < 1e-3 * 3.0 / length,
                "{length}: {value} {expected}"
            );
        }
    }
    let far = spectrum
        .difference()
        .iter()
        .map(|value| value.norm())
        .fold(0.0, f64::max);
    assert!(far < 1e-6, "{far}");
    let found = spectrum.compare(3.0, 9.0);
    assert_eq!(found.misfits, []);
    assert_eq!(found.peaks.len(), 1);
    assert!((found.peaks[0].length - 3.0).abs() < 0.003);
    assert!((found.peaks[0].amplitude - 0.3).abs() < 3e-4);
    assert_eq!(found.peaks[0].agreement, Some(Agreement::Full));
    // The same height with the opposite sign is no match.
    let opposite = Term {
        coefficient: -c,
        ..term
    };
    let found = wave_spectrum(c, 3.0, taper, &[opposite]).compare(3.0, 9.0);
    assert_eq!(found.peaks[0].agreement, Some(Agreement::None));
    assert_eq!(found.misfits.len(), 1);
    assert_eq!(found.misfits[0].side, Side::Phase);
    assert!((found.misfits[0].size - 0.6).abs() < 1e-3);
    assert!(found.explained.expect("something") < -2.9);
}

proptest! {
    /// A shape s times as large has its levels at k/s and its peaks at s times the lengths, as high as before.
    #[test]
    fn lengths_scale_with_the_shape(s in 0.01..100.0_f64, phase in 0.0..6.0_f64, length in 2.0..7.0_f64) {
        let taper = Taper { from: 5.0, to: 45.0 };
        let c = Complex64::from_polar(0.2, phase);
        let term = |s: f64| Term { length: s * length, coefficient: 0.9 * c, amplitude: Amplitude::Constant, repetition: 1 };
        let spectrum = |s: f64| {
            let levels: Vec<f64> = levels_of_a_wave(c, length, taper).iter().map(|k| k / s).collect();
            LengthSpectrum::new(&LengthInput {
                levels: &levels,
                errors: None,
                density: &|_| 10.0 * s,
                terms: &[term(s)],
                taper: Taper { from: 5.0 / s, to: 45.0 / s },
                longest: 9.0 * s,
            })
            .expect("lengths")
            .compare(2.0 * s, 9.0 * s)
        };
        let (plain, scaled) = (spectrum(1.0), spectrum(s));
        prop_assert_eq!(plain.peaks.len(), scaled.peaks.len());
        for (a, b) in plain.peaks.iter().zip(&scaled.peaks) {
            prop_assert!((s * a.length - b.length).abs() < 1e-6 * s);
            prop_assert!((a.amplitude - b.amplitude).abs() < 1e-6);
            prop_assert_eq!(a.agreement, b.agreement);
        }
    }
}

/// Mean of 2/(i l W) w(k) d(k) exp(-i k l) over the window for the orbits of a rectangle with m and n reflections in each direction:
/// (times a b k/(2 pi)) J0(k l) for each of the signs of m and n, less a cos(2 m k a)/(2 pi) along the walls, likewise b.
fn rectangle_peak(a: f64, b: f64, taper: Taper, at: f64) -> f64 {
    let n = 20_000;
    let step = (taper.to - taper.from) / f64::from(n);
    let mut families = Vec::new();
    for m in 0..8 {
        for n in 0..8 {
            let copies = match (m, n) {
                (0, 0) => 0.0,
                (0, _) | (_, 0) => 2.0,
                _ => 4.0,
            };
            let length = 2.0 * (f64::from(m) * a).hypot(f64::from(n) * b);
            families.push((m, n, copies, length));
        }
    }
    let density = |k: f64| -> f64 {
        families
            .iter()
            .filter(|(.., copies, _)| *copies > 0.0)
            .map(|&(m, n, copies, length)| {
                let edge = match (m, n) {
                    (_, 0) => a / PI * (k * length).cos(),
                    (0, _) => b / PI * (k * length).cos(),
                    _ => 0.0,
                };
                copies * a * b * k / (2.0 * PI) * libm::j0(k * length) - edge
            })
            .sum()
    };
    let sum: Complex64 = (0..n)
        .map(|i| taper.from + step * f64::from(i))
        .map(|k| taper.weight(k) * density(k) * Complex64::cis(-k * at))
        .sum();
    (sum * step * 2.0 / (at * taper.area())).norm()
}

#[test]
fn a_rectangle_has_its_peaks_at_the_closed_lengths_and_as_high() {
    let (a, b) = (1.0, 1.3);
    let taper = Taper {
        from: 6.0,
        to: 86.0,
    };
    let orbits = Orbits::find(shape("rectangle", &[]), 9.0);
    let found = orbits.compare(&rectangle_levels(a, b, 86.0), taper);
    assert_eq!(found.misfits, []);
    assert!(found.explained.expect("something") > 0.999_999);
    let mut checked = 0;
    for (m, n) in [
        (1, 0),
        (0, 1),
        (1, 1),
        (2, 0),
        (0, 2),
        (2, 1),
        (1, 2),
        (2, 2),
        (3, 1),
    ] {
        let length = 2.0 * (f64::from(m) * a).hypot(f64::from(n) * b);
        let peak = found
            .peaks
            .iter()
            .min_by(|p, q| {
                (p.length - length)
                    .abs()
                    .total_cmp(&(q.length - length).abs())
            })
            .expect("peaks");
        // Peaks that overlap lean towards each other by a part of the resolution (0.185).
        assert!(
            (peak.length - length).abs() < 0.03,
            "({m}, {n}): {}",
            peak.length
        );
        assert_eq!(peak.agreement, Some(Agreement::Full));
        let height = rectangle_peak(a, b, taper, peak.length);
        assert!(
            (peak.amplitude / height - 1.0).abs() < 2e-3,
            "({m}, {n}): {} {height}",
            peak.amplitude
        );
        checked += 1;
    }
    assert_eq!(checked, 9);
}

#[test]
fn a_disk_has_its_peaks_at_its_chords() {
    let orbits = Orbits::find(shape("disk", &[]), 20.0);
    let found = orbits.compare(
        &levels("disk_d.csv"),
        Taper {
            from: 6.0,
            to: 65.0,
        },
    );
    assert!(found.explained.expect("something") > 0.99);
    // Those that no other comes closer to than the resolution (0.25): 2 v sin(pi w/v).
    for (v, w) in [(2, 1), (3, 1), (4, 2), (5, 2), (6, 2), (7, 3), (8, 3)] {
        let length = 2.0 * f64::from(v) * (PI * f64::from(w) / f64::from(v)).sin();
        let near = found
            .peaks
            .iter()
            .find(|peak| (peak.length - length).abs() < 0.02);
        let peak = near.unwrap_or_else(|| panic!("{v} {w}: {length} in {:?}", found.peaks));
        assert_eq!(peak.agreement, Some(Agreement::Full), "{v} {w}");
        // Far above anything that a missing orbit leaves.
        assert!(peak.amplitude > 0.2, "{v} {w}");
    }
}

#[test]
fn strip_edges_that_diffract_in_the_l_shape_are_reported() {
    let orbits = Orbits::find(shape("l-shape", &[]), 12.0);
    let found = orbits.compare(
        &shipped_levels("data/levels/l-shape.csv"),
        Taper {
            from: 6.0,
            to: 37.3,
        },
    );
    let strips = orbits
        .catalogue
        .omissions
        .iter()
        .find(|left_out| left_out.kind == OmissionKind::StripCorners)
        .expect("an estimate");
    for length in [3.99, 8.4, 8.9] {
        let misfit = found
            .misfits
            .iter()
            .find(|misfit| (misfit.length - length).abs() < 0.1)
            .unwrap_or_else(|| panic!("{length} in {:?}", found.misfits));
        assert!(misfit.size > 0.1, "{misfit:?}");
        assert!(strips.shows_at(misfit.length, 0.24), "{misfit:?}");
    }
    assert!(!strips.shows_at(2.8, 0.24));
}

/// Each orbit of some size is taken out of the sum, one at a time. What is reported then is its term and what the sum leaves over without
/// that, which at 4.83 is 0.011 level, below 0.005 elsewhere.
#[test]
fn an_orbit_that_the_search_left_out_is_reported_with_its_amplitude() {
    let orbits = Orbits::find(shape("quarter-stadium", &[]), 10.0);
    let list = shipped_levels("data/levels/quarter-stadium.csv");
    let taper = Taper {
        from: 7.6,
        to: 45.9,
    };
    let whole = orbits.spectrum(&list, taper, &orbits.terms);
    let left_over: Vec<f64> = whole
        .difference()
        .iter()
        .map(|value| value.norm())
        .collect();
    let all = orbits.compare(&list, taper);
    let mut errors = Vec::new();
    for (index, term) in orbits.terms.iter().enumerate() {
        let size = term.coefficient.norm();
        if term.amplitude != Amplitude::Constant || size < 0.04 || term.length > 6.3 {
            continue;
        }
        let mut terms = orbits.terms.clone();
        terms.remove(index);
        let found = orbits
            .spectrum(&list, taper, &terms)
            .compare(orbits.shortest(), orbits.longest);
        assert!(found.explained < all.explained);
        let misfit = found
            .misfits
            .iter()
            .min_by(|a, b| {
                let distance = |length: f64| (length - term.length).abs();
                distance(a.length).total_cmp(&distance(b.length))
            })
            .expect("something is missing");
        // A sixth of the resolution.
        assert!(
            (misfit.length - term.length).abs() < 0.06,
            "{term:?} {misfit:?}"
        );
        let place = whole
            .lengths
            .partition_point(|&length| length < misfit.length);
        assert!(
            (misfit.size - size).abs() < left_over[place] + 0.01 * size,
            "{term:?} {misfit:?} {}",
            left_over[place]
        );
        errors.push((misfit.size / size - 1.0).abs());
    }
    errors.sort_by(f64::total_cmp);
    assert_eq!(errors.len(), 13);
    assert!(errors[6] < 0.03, "{errors:?}");
}

/// Lists with noise of three kinds, of a shape whose terms are exact: whatever is listed is noise. One list in a hundred is the promise.
#[test]
fn noise_is_not_listed() {
    let taper = Taper {
        from: 6.0,
        to: 46.0,
    };
    let orbits = Orbits::find(shape("rectangle", &[]), 12.0);
    let list = rectangle_levels(1.0, 1.3, 47.0);
    let spacing = weyl(&orbits.domain, &detect(&orbits.domain), None).mean_spacing(26.0);
    let mut random = Random(1);
    for kind in ["jitter", "missing", "false"] {
        let mut lists = 0;
        for _ in 0..200 {
            let mut levels: Vec<f64> = match kind {
                "jitter" => list
                    .iter()
                    .map(|k| k + 0.05 * spacing * random.normal())
                    .collect(),
                "missing" => list
                    .iter()
                    .copied()
                    .filter(|_| random.next() > 0.03)
                    .collect(),
                _ => {
                    let added: Vec<f64> = (0..8).map(|_| 6.0 + 40.0 * random.next()).collect();
                    list.iter().copied().chain(added).collect()
                }
            };
            levels.sort_by(f64::total_cmp);
            let found = orbits.compare(&levels, taper);
            lists += usize::from(!found.misfits.is_empty());
            // What stands far above the noise is still found: a strip and the diagonal, at 2, 2.6 or 3.28.
            assert!(!found.peaks.is_empty(), "{kind}");
        }
        assert!(lists <= 4, "{kind}: {lists} of 200 lists");
    }
}

/// Errors that the list states are its noise, measured below the shortest orbit or not.
#[test]
fn stated_errors_are_noise() {
    let taper = Taper {
        from: 6.0,
        to: 46.0,
    };
    let orbits = Orbits::find(shape("rectangle", &[]), 12.0);
    let list = rectangle_levels(1.0, 1.3, 47.0);
    let mut random = Random(2);
    let error = 0.01;
    let jittered: Vec<f64> = list.iter().map(|k| k + error * random.normal()).collect();
    let errors = vec![error; list.len()];
    let smooth = weyl(&orbits.domain, &detect(&orbits.domain), None);
    let spectrum = |levels: &[f64]| {
        LengthSpectrum::new(&LengthInput {
            levels,
            errors: Some(&errors),
            density: &|k| smooth.density(k, 0.0),
            terms: &orbits.terms,
            taper,
            longest: 12.0,
        })
        .expect("lengths")
    };
    let (exact, noisy) = (spectrum(&list), spectrum(&jittered));
    let compared = noisy.compare(orbits.shortest(), 12.0);
    let squares: Vec<f64> = exact
        .levels
        .iter()
        .zip(&noisy.levels)
        .map(|(a, b)| (a - b).norm_sqr())
        .collect();
    // About 40 independent values: their root mean square is good to 8 %.
    let measured = (0.5 * squares.iter().sum::<f64>() / squares.len() as f64).sqrt();
    let stated = compared.noise.least;
    assert!(
        (measured / stated - 1.0).abs() < 0.25,
        "{measured} {stated}"
    );
}
