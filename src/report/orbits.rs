//! Small multiples: one outline and one orbit in each panel.

use super::canvas::{
    Anchor, BORDER, Canvas, LEADING, Lettering, Stroke, TEXT, WIDTH, palette, polyline, wrap,
};
use super::legend::{Sample, legend};
use super::outline::{View, bounds, closed};
use crate::billiard::{Domain, Role, Vec2};

/// Orbits that one picture holds; further ones are left out, and the picture says so.
pub const LARGEST_GRID: usize = 24;
/// Space between two panels, points.
const GAP: f64 = 12.0;
/// Largest height of one outline, points: four of them and their labels fit on a page.
const LARGEST_HEIGHT: f64 = 150.0;
/// Bounces above which no dots are drawn: they would hide the orbit.
const MOST_DOTS: usize = 40;

/// Walls behind an orbit.
const OUTLINE: Stroke = Stroke::solid(palette::GREY, 0.8);

/// How an orbit's line is drawn: by what it is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum OrbitStroke {
    /// Isolated orbit: solid.
    Isolated,
    /// Orbit along an axis of symmetry: dash-dotted.
    Axis,
    /// One member of a family: dashed.
    Family,
    /// Orbit through a joint: dotted.
    Joint,
}

impl OrbitStroke {
    const ALL: [Self; 4] = [Self::Isolated, Self::Axis, Self::Family, Self::Joint];

    fn stroke(self) -> Stroke {
        match self {
            Self::Isolated => Stroke::solid(palette::BLUE, 1.1),
            Self::Axis => Stroke::broken(palette::VERMILLION, 1.1, "8 2.5 1.5 2.5"),
            Self::Family => Stroke::broken(palette::GREEN, 1.1, "5 3"),
            Self::Joint => Stroke::broken(palette::BLACK, 1.3, "1.5 2.5"),
        }
    }

    fn meaning(self) -> &'static str {
        match self {
            Self::Isolated => "isolated orbit",
            Self::Axis => "orbit on an axis of symmetry",
            Self::Family => "one orbit of a family",
            Self::Joint => "orbit through a joint",
        }
    }
}

/// One orbit to be drawn.
#[derive(Clone, Debug)]
pub struct OrbitDrawing<'a> {
    /// What is written below it, such as `#3 L = 4.8284, 4 bounces`.
    pub label: String,
    /// Bounce points of the full orbit, in order; the last one is joined to the first.
    pub path: &'a [Vec2],
    /// How its line is drawn.
    pub stroke: OrbitStroke,
}

/// Draws up to [`LARGEST_GRID`] orbits, each in its own outline with its label below.
#[must_use]
pub fn orbits_picture(domain: &Domain, orbits: &[OrbitDrawing<'_>], title: &str) -> String {
    let shown = &orbits[..orbits.len().min(LARGEST_GRID)];
    let mut canvas = Canvas::new(title, &description(shown, orbits.len()));
    let mut top = canvas.heading() + 2.0;
    if shown.len() < orbits.len() || orbits.is_empty() {
        let text = if orbits.is_empty() {
            "no orbit to draw".to_owned()
        } else {
            format!("the first {} of {} orbits", shown.len(), orbits.len())
        };
        top = canvas.paragraph(&text, top, Lettering::plain(Anchor::Start));
    }
    let kinds: Vec<OrbitStroke> = OrbitStroke::ALL
        .into_iter()
        .filter(|kind| shown.iter().any(|orbit| orbit.stroke == *kind))
        .collect();
    if kinds.len() > 1 {
        let entries: Vec<_> = kinds
            .iter()
            .map(|kind| (Sample::Line(kind.stroke()), kind.meaning().to_owned()))
            .collect();
        top = legend(&mut canvas, &entries, BORDER, WIDTH - BORDER, top);
    }
    let bottom = draw_grid(&mut canvas, domain, shown, top + 6.0);
    canvas.finish(bottom + BORDER)
}

/// Draws the panels row by row; returns the height of the lower edge.
fn draw_grid(canvas: &mut Canvas, domain: &Domain, orbits: &[OrbitDrawing<'_>], top: f64) -> f64 {
    let frame = bounds(domain);
    let columns = columns(frame, orbits.len());
    let cell = (WIDTH - 2.0 * BORDER - GAP * (columns - 1) as f64) / columns as f64;
    let scale = View::scale_for(frame, cell - 4.0, LARGEST_HEIGHT);
    let height = (frame.1.y - frame.0.y) * scale + 4.0;
    let mut top = top;
    for row in orbits.chunks(columns) {
        let mut lines = 0;
        for (column, orbit) in row.iter().enumerate() {
            let left = BORDER + column as f64 * (cell + GAP);
            let center = Vec2::new(left + 0.5 * cell, top + 0.5 * height);
            draw_orbit(canvas, domain, orbit, &View::centered(frame, scale, center));
            let label = wrap(&orbit.label, cell + 0.5 * GAP, TEXT);
            lines = lines.max(label.len());
            for (index, line) in label.iter().enumerate() {
                let base = top + height + TEXT + 2.0 + index as f64 * LEADING * TEXT;
                canvas.text(
                    Vec2::new(center.x, base),
                    Lettering::plain(Anchor::Middle),
                    line,
                );
            }
        }
        top += height + 2.0 + lines as f64 * LEADING * TEXT + GAP;
    }
    top - GAP
}

/// Panels beside each other: four, or fewer where the domain is much wider than high or there are fewer orbits.
fn columns((low, high): (Vec2, Vec2), count: usize) -> usize {
    let aspect = (high.x - low.x) / (high.y - low.y);
    let most = if aspect > 4.0 {
        2
    } else if aspect > 2.5 {
        3
    } else {
        4
    };
    // Two rows of three look better than one of four and one of two.
    if (5..=6).contains(&count) {
        most.min(3)
    } else {
        most.min(count.max(1))
    }
}

fn draw_orbit(canvas: &mut Canvas, domain: &Domain, orbit: &OrbitDrawing<'_>, view: &View) {
    for chain in &domain.loops {
        let path = view.loop_path(domain, chain);
        if chain.role == Role::Hole {
            canvas.area(&path, palette::LIGHT_GREY);
        }
        canvas.path(&path, OUTLINE);
    }
    let points: Vec<Vec2> = orbit
        .path
        .iter()
        .filter(|point| point.x.is_finite() && point.y.is_finite())
        .map(|point| view.place(*point))
        .collect();
    let data = if points.len() > 2 {
        closed(&points)
    } else {
        polyline(&points)
    };
    canvas.path(&data, orbit.stroke.stroke());
    if points.len() <= MOST_DOTS {
        for point in &points {
            canvas.circle(*point, 1.7, orbit.stroke.stroke().color, None);
        }
    }
}

fn description(shown: &[OrbitDrawing<'_>], count: usize) -> String {
    let labels: Vec<&str> = shown.iter().map(|orbit| orbit.label.as_str()).collect();
    format!(
        "Periodic orbits in the outline of the domain, one in each panel, {} of {count}: {}.",
        shown.len(),
        labels.join("; ")
    )
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::super::testing::{checked, keep, mixed_polygon, ring, stadium};
    use super::*;

    /// Chords of a regular star, not real orbits: a picture does not ask.
    fn star(count: usize) -> Vec<Vec2> {
        (0..count)
            .map(|index| {
                let angle = 2.0 * std::f64::consts::TAU * index as f64 / count as f64;
                Vec2::new(angle.cos(), angle.sin())
            })
            .collect()
    }

    fn drawing(path: &[Vec2], index: usize) -> OrbitDrawing<'_> {
        OrbitDrawing {
            label: format!(
                "#{}  L = {:.4}, {} bounces",
                index + 1,
                4.0 + 0.2 * index as f64,
                path.len()
            ),
            path,
            stroke: OrbitStroke::ALL[index % 4],
        }
    }

    #[test]
    fn full_grids_are_well_formed_and_say_what_they_leave_out() {
        let paths: Vec<Vec<Vec2>> = (0..30).map(|index| star(index + 2)).collect();
        let orbits: Vec<_> = paths
            .iter()
            .enumerate()
            .map(|(index, path)| drawing(path, index))
            .collect();
        for (name, domain) in [("stadium", stadium()), ("ring", ring())] {
            let picture = orbits_picture(&domain, &orbits, name);
            keep(&format!("orbits-{name}"), &picture);
            let texts = checked(&picture);
            assert!(texts.contains(&"the first 24 of 30 orbits".to_owned()));
            assert_eq!(picture, orbits_picture(&domain, &orbits, name));
            assert!(picture.len() < 200_000, "{}", picture.len());
        }
        let picture = orbits_picture(&stadium(), &orbits[..5], "five");
        keep("orbits-five", &picture);
        checked(&picture);
    }

    #[test]
    fn nothing_one_point_and_no_number_give_a_picture() {
        let domain = mixed_polygon();
        assert!(
            checked(&orbits_picture(&domain, &[], "none")).contains(&"no orbit to draw".to_owned())
        );
        let broken = [Vec2::new(f64::NAN, 0.0), Vec2::new(10.0, 10.0)];
        for path in [&broken[..0], &broken[..1], &broken[1..], &broken[..]] {
            let orbit = OrbitDrawing {
                label: "a < b & c".into(),
                path,
                stroke: OrbitStroke::Isolated,
            };
            let texts = checked(&orbits_picture(&domain, &[orbit], ""));
            assert!(texts.contains(&"a &lt; b &amp; c".to_owned()));
        }
    }
}
