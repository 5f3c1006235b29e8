//! How far a predicted staircase is from that of a list.

/// Distance from the end of a list, in standard deviations of the smoothing, within which its staircase is not used: a step
/// beyond the end of the list is felt by 3e-7 of a level there.
const CUT: f64 = 5.0;

/// Where a residual is taken, all in the unit of the levels.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ResidualWindow {
    /// First point that counts.
    pub from: f64,
    /// Last point that counts.
    pub to: f64,
    /// Where the list ends: the largest value below which it is complete, its last level where nothing else is known.
    pub list_end: f64,
    /// Standard deviation of the Gaussian that both sides were smoothed with.
    pub smoothing: f64,
}

/// The size of a residual over a window.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Residual {
    /// Root mean square, in levels; nothing is left to take it over where `points` is 0.
    pub rms: Option<f64>,
    /// Number of points that it was taken over.
    pub points: usize,
    /// Last value that counts, after the end of the list was cut off.
    pub used_to: f64,
    /// Length that was cut off the window because the list ends too early, 0 where none.
    pub cut: f64,
}

/// The root mean square of `residual`, given at `points`, over a window.
///
/// Points nearer than five standard deviations to the end of the list are left out.
pub fn residual_rms(points: &[f64], residual: &[f64], window: &ResidualWindow) -> Residual {
    let used_to = window.to.min(window.list_end - CUT * window.smoothing);
    let inside = |point: f64| window.from <= point && point <= used_to;
    let pairs = points
        .iter()
        .zip(residual)
        .filter(|&(&point, _)| inside(point));
    let (count, sum) = pairs.fold((0, 0.0), |(count, sum), (_, value)| {
        (count + 1, sum + value * value)
    });
    Residual {
        rms: (count > 0).then(|| (sum / f64::from(count)).sqrt()),
        points: count as usize,
        used_to,
        cut: (window.to - used_to.max(window.from)).max(0.0),
    }
}
