//! Is a list of levels with errors the exact one?
#![allow(dead_code)]

use std::fmt;

/// Relative accuracy of exact levels: tables have 15 digits, closed forms a few roundings.
pub(crate) const REFERENCE_ACCURACY: f64 = 5e-15;
/// Exact levels that differ by less than this (relative) are the same level.
const SAME: f64 = 1e-14;
/// Part of the levels whose true error may exceed the stated one.
const BROKEN: f64 = 0.01;
/// Largest median of stated over true error: a statement that is always far too large says nothing.
const LARGEST_MEDIAN: f64 = 100.0;

/// One row of a list.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Found {
    pub(crate) k: f64,
    /// Stated error of k, absolute.
    pub(crate) error: f64,
    pub(crate) multiplicity: usize,
}

/// What a list is compared with.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Expected<'a> {
    /// Ascending, each as often as its multiplicity says.
    pub(crate) levels: &'a [f64],
    /// Do equal levels belong to one row?
    pub(crate) degenerate: bool,
    /// Largest relative deviation in k.
    pub(crate) claim: f64,
}

/// How good a list is.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Verdict {
    /// Number of levels with multiplicity.
    pub(crate) count: usize,
    /// Number of rows.
    pub(crate) rows: usize,
    /// Largest relative deviation.
    pub(crate) worst: f64,
    /// Rows whose true error exceeds the stated one.
    pub(crate) broken: usize,
    /// Median of stated over true error.
    pub(crate) median: f64,
}

impl fmt::Display for Verdict {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "{} levels, deviation at most {:.1e}, stated errors broken by {}, {:.1} times the true ones in the median",
            self.count, self.worst, self.broken, self.median
        )
    }
}

/// Relative deviation in k, as half of that of the energy k^2 (the level k = 0 has one in the energy only), on a scale of at
/// least 1.
pub(crate) fn deviation(k: f64, exact: f64) -> f64 {
    0.5 * ((k - exact) * (k + exact)).abs() / (exact * exact).max(1.0)
}

/// How many stated errors of so many rows may be smaller than the true ones: one in a hundred, and one in a list too short to
/// tell; lists that belong together are counted together as well.
pub(crate) fn may_break(rows: usize) -> usize {
    (BROKEN * rows as f64).ceil() as usize
}

/// Each level as often as its multiplicity says.
pub(crate) fn copies(rows: &[Found]) -> Vec<f64> {
    rows.iter()
        .flat_map(|row| std::iter::repeat_n(row.k, row.multiplicity))
        .collect()
}

/// Compares level by level in order of k.
pub(crate) fn judge(found: &[Found], expected: &Expected<'_>) -> Result<Verdict, String> {
    let exact = expected.levels;
    let listed = copies(found);
    if let Some(pair) = found.windows(2).find(|pair| pair[1].k < pair[0].k) {
        return Err(format!("{} stands before {}", pair[0].k, pair[1].k));
    }
    if listed.len() != exact.len() {
        let place = first_difference(&listed, exact);
        return Err(format!(
            "{} levels instead of {}, different from k = {place}",
            listed.len(),
            exact.len()
        ));
    }
    let mut worst: f64 = 0.0;
    for (n, (&k, &level)) in listed.iter().zip(exact).enumerate() {
        let distance = deviation(k, level);
        if distance.is_nan() || distance > expected.claim {
            return Err(format!(
                "level {} is {k} instead of {level}, off by {distance:.1e}",
                n + 1
            ));
        }
        worst = worst.max(distance);
    }
    if expected.degenerate {
        check_multiplicities(found, exact)?;
    }
    let (broken, median) = judge_errors(found, exact)?;
    Ok(Verdict {
        count: exact.len(),
        rows: found.len(),
        worst,
        broken,
        median,
    })
}

/// The first place where two lists differ by more than a thousandth, for people.
fn first_difference(listed: &[f64], exact: &[f64]) -> f64 {
    listed
        .iter()
        .zip(exact)
        .find(|(k, level)| (*k - *level).abs() > 1e-3)
        .map(|(_, level)| *level)
        .or_else(|| exact.get(listed.len()).copied())
        .or_else(|| listed.get(exact.len()).copied())
        .unwrap_or(0.0)
}

/// Equal exact levels are one row.
fn check_multiplicities(found: &[Found], exact: &[f64]) -> Result<(), String> {
    let groups = exact.chunk_by(|a, b| b - a < SAME * b.max(1.0));
    for (n, (row, group)) in found.iter().zip(groups).enumerate() {
        if row.multiplicity != group.len() {
            let next = found.get(n + 1).map_or(String::new(), |next| {
                format!(
                    "; the next one is {} with the error {:.1e}",
                    next.k, next.error
                )
            });
            return Err(format!(
                "level {} with the error {:.1e} has multiplicity {} instead of {}{next}",
                row.k,
                row.error,
                row.multiplicity,
                group.len()
            ));
        }
    }
    Ok(())
}

/// Number of broken statements and median of stated over true error. True errors count from the accuracy of the exact levels on.
fn judge_errors(found: &[Found], exact: &[f64]) -> Result<(usize, f64), String> {
    let mut rest = exact;
    let mut broken = Vec::new();
    let mut ratios = Vec::with_capacity(found.len());
    for row in found {
        let (group, others) = rest.split_at(row.multiplicity);
        rest = others;
        if !row.error.is_finite() || row.error < 0.0 {
            return Err(format!("level {} has the error {}", row.k, row.error));
        }
        let true_error = group
            .iter()
            .map(|level| (row.k - level).abs())
            .fold(0.0, f64::max);
        let unknown = REFERENCE_ACCURACY * row.k.max(1.0);
        if true_error > row.error + unknown {
            broken.push((row, true_error));
        }
        ratios.push(row.error / true_error.max(unknown));
    }
    if broken.len() > may_break(found.len()) {
        let ratio = |(row, off): &(&Found, f64)| off / row.error;
        let worst = broken.iter().max_by(|a, b| ratio(a).total_cmp(&ratio(b)));
        let worst = worst.map_or(String::new(), |(row, off)| {
            format!(
                ", the worst at k = {}: {:.1e}, off by {off:.1e}",
                row.k, row.error
            )
        });
        return Err(format!(
            "{} of {} stated errors are smaller than the true ones{worst}",
            broken.len(),
            found.len()
        ));
    }
    ratios.sort_by(f64::total_cmp);
    let median = ratios.get(ratios.len() / 2).copied().unwrap_or(0.0);
    if median > LARGEST_MEDIAN {
        return Err(format!(
            "stated errors are {median:.0} times the true ones in the median"
        ));
    }
    Ok((broken.len(), median))
}
