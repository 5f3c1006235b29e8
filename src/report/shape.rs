//! The picture of a shape: walls, corners, axes of symmetry.

use super::axis::{Axis, rounded};
use super::canvas::{Anchor, BORDER, Canvas, Lettering, Stroke, TEXT, WIDTH, palette, polyline};
use super::legend::{Entry, Mark, Sample, legend};
use super::outline::{View, bounds, sampled};
use super::panel::Panel;
use crate::billiard::{Condition, Domain, Role, Symmetry, Vec2, Vertex, VertexKind, cross};

/// Room for the labels of the y axis, points.
const LEFT: f64 = 56.0;
/// Largest height of the drawing, points: with legend and text it still fits on half a page.
const LARGEST_HEIGHT: f64 = 330.0;
/// Part of the domain's extent left free around it, for marks and the angles at corners.
const MARGIN: f64 = 0.09;
/// Part of the domain's size by which an axis of symmetry is drawn beyond the outline, as draughtsmen do.
const OVERHANG: f64 = 0.03;
/// Corners nearer to each other than this, in points, get no text: it would run into the next one's.
const ROOM: f64 = 26.0;
/// Distance of the text at a corner from the corner, points.
const TEXT_DISTANCE: f64 = 12.0;
/// Half the distance at which the two faces of a thin wall are drawn if they differ, points.
const FACE: f64 = 1.3;

/// A wall on which the wave vanishes.
const DIRICHLET: Stroke = Stroke::solid(palette::BLACK, 1.9);
/// A wall on which the normal derivative vanishes.
const NEUMANN: Stroke = Stroke::broken(palette::BLUE, 1.9, "5.5 3");
/// An axis of symmetry.
const AXIS: Stroke = Stroke::broken(palette::VERMILLION, 0.7, "9 2.5 1.5 2.5");
/// Inside of a hole.
const HOLE: &str = palette::LIGHT_GREY;

/// Draws a shape: Dirichlet walls solid, Neumann walls dashed, corners marked by their kind (open circle: diffracts; filled
/// square with its angle: continued by reflections; stroke: joint with a jump of curvature), axes of symmetry dash-dotted,
/// holes grey. `length_unit` is named on the axes.
///
/// ```
/// use orbitsum::billiard::{Condition, Domain, Line, Role, Shape, Symmetry, Vec2, Wall};
/// use orbitsum::report::shape_picture;
///
/// let corners = [Vec2::new(0.0, 0.0), Vec2::new(1.0, 0.0), Vec2::new(0.0, 1.0)];
/// let walls = (0..3)
///     .map(|i| Shape::Line(Line { start: corners[i], end: corners[(i + 1) % 3] }))
///     .map(|shape| Wall::new(shape, Condition::Dirichlet))
///     .collect();
/// let triangle = Domain::new(vec![(Role::Outer, walls)])?;
/// let picture = shape_picture(&triangle, &Symmetry::trivial(), "triangle", Some("mm"));
/// assert!(picture.contains("<title>triangle</title>"));
/// # Ok::<(), orbitsum::billiard::GeometryError>(())
/// ```
#[must_use]
pub fn shape_picture(
    domain: &Domain,
    symmetry: &Symmetry,
    title: &str,
    length_unit: Option<&str>,
) -> String {
    let mut canvas = Canvas::new(title, &description(domain, symmetry));
    let top = canvas.heading() + 2.0;
    let top = legend(
        &mut canvas,
        &entries(domain, symmetry),
        BORDER,
        WIDTH - BORDER,
        top,
    ) + 6.0;
    let (panel, view) = layout(domain, top);
    panel.grid(&mut canvas);
    let axes = reflection_axes(domain, symmetry);
    draw_holes(&mut canvas, domain, &view);
    for (from, to) in &axes {
        canvas.line(view.place(*from), view.place(*to), AXIS);
    }
    draw_walls(&mut canvas, domain, &view);
    if has_center(symmetry) {
        Mark::Cross.draw(&mut canvas, view.place(symmetry.center), Vec2::x());
    }
    draw_vertices(&mut canvas, domain, &view);
    let bottom = panel.axes(&mut canvas, true);
    let named = |name: &str| length_unit.map_or(name.to_owned(), |unit| format!("{name} ({unit})"));
    let bottom = panel.name_x(&mut canvas, &named("x"), bottom);
    panel.name_y(&mut canvas, &[named("y")], LEFT - BORDER - TEXT);
    let facts = facts(domain, symmetry, length_unit);
    let bottom = canvas.paragraph(&facts, bottom + 3.0, Lettering::plain(Anchor::Start));
    canvas.finish(bottom + BORDER)
}

/// Panel and view of a domain, the panel's upper edge at a height.
fn layout(domain: &Domain, top: f64) -> (Panel, View) {
    let (low, high) = bounds(domain);
    let margin = MARGIN * (high - low).max();
    let frame = (low - Vec2::repeat(margin), high + Vec2::repeat(margin));
    let width = WIDTH - LEFT - BORDER - 6.0;
    let scale = View::scale_for(frame, width, LARGEST_HEIGHT);
    let height = (frame.1.y - frame.0.y) * scale;
    let center = Vec2::new(LEFT + 0.5 * width, top + 0.5 * height);
    let view = View::centered(frame, scale, center);
    // The panel takes the whole width; what the domain leaves free shows as empty plane to both sides.
    let half = 0.5 * width / scale;
    let middle = 0.5 * (low.x + high.x);
    let panel = Panel {
        corner: Vec2::new(LEFT, top),
        size: Vec2::new(width, height),
        x: Axis {
            low: middle - half,
            high: middle + half,
        },
        y: Axis {
            low: frame.0.y,
            high: frame.1.y,
        },
    };
    (panel, view)
}

fn draw_holes(canvas: &mut Canvas, domain: &Domain, view: &View) {
    for chain in domain.loops.iter().filter(|chain| chain.role == Role::Hole) {
        canvas.area(&view.loop_path(domain, chain), HOLE);
    }
}

fn draw_walls(canvas: &mut Canvas, domain: &Domain, view: &View) {
    for (index, wall) in domain.walls.iter().enumerate() {
        let stroke = match wall.condition {
            Condition::Dirichlet => DIRICHLET,
            Condition::Neumann => NEUMANN,
        };
        let twin = wall
            .twin
            .and_then(|twin| domain.walls.get(twin).map(|other| (twin, other)));
        match twin {
            Some((twin, other)) if other.condition == wall.condition => {
                if index < twin {
                    canvas.flat_path(&view.wall_path(wall), stroke);
                }
            }
            Some(_) => {
                let shift = |place: &Vec2, along: Vec2| {
                    place
                        + Vec2::new(along.y, -along.x) * FACE / along.norm().max(f64::MIN_POSITIVE)
                };
                let chain = view.chain(&sampled(wall));
                let moved: Vec<Vec2> = (0..chain.len())
                    .map(|i| {
                        let along =
                            chain[(i + 1).min(chain.len() - 1)] - chain[i.saturating_sub(1)];
                        shift(&chain[i], along)
                    })
                    .collect();
                canvas.flat_path(
                    &polyline(&moved),
                    Stroke {
                        width: 1.4,
                        ..stroke
                    },
                );
            }
            None => canvas.flat_path(&view.wall_path(wall), stroke),
        }
    }
}

/// The mark of a kind of vertex.
fn mark(kind: VertexKind) -> Option<Mark> {
    match kind {
        VertexKind::Smooth => None,
        VertexKind::Joint => Some(Mark::Stroke),
        VertexKind::Regular { .. } => Some(Mark::Square),
        VertexKind::Corner => Some(Mark::Circle),
    }
}

fn draw_vertices(canvas: &mut Canvas, domain: &Domain, view: &View) {
    let places: Vec<Vec2> = domain
        .vertices
        .iter()
        .map(|vertex| view.place(vertex.point))
        .collect();
    for (index, vertex) in domain.vertices.iter().enumerate() {
        let VertexKind::Regular { n } = vertex.kind else {
            continue;
        };
        let alone = places
            .iter()
            .enumerate()
            .all(|(other, place)| other == index || (place - places[index]).norm() > ROOM);
        if alone {
            let place = places[index] + view.turn(outwards(domain, vertex)) * TEXT_DISTANCE;
            let text = format!("\u{3c0}/{n}");
            canvas.text(
                place + Vec2::new(0.0, 0.35 * TEXT),
                Lettering::plain(Anchor::Middle),
                &text,
            );
        }
    }
    // The circles last: where several vertices share a point, the one that diffracts counts.
    for wanted in [Mark::Stroke, Mark::Square, Mark::Circle] {
        for (vertex, place) in domain.vertices.iter().zip(&places) {
            if mark(vertex.kind) == Some(wanted) {
                let normal = domain.walls[vertex.after].frame(0.0).normal();
                wanted.draw(canvas, *place, view.turn(normal));
            }
        }
    }
}

/// Unit vector from a corner away from the domain, halfway between its walls.
fn outwards(domain: &Domain, vertex: &Vertex) -> Vec2 {
    let before = &domain.walls[vertex.before];
    let normal =
        before.frame(before.extent()).normal() + domain.walls[vertex.after].frame(0.0).normal();
    if normal.norm() > 1e-6 {
        -normal.normalize()
    } else {
        -domain.walls[vertex.after].frame(0.0).tangent
    }
}

/// Ends of the axes of the reflections in a group, a little beyond the outline.
fn reflection_axes(domain: &Domain, symmetry: &Symmetry) -> Vec<(Vec2, Vec2)> {
    let outline: Vec<Vec2> = domain.walls.iter().flat_map(sampled).collect();
    symmetry
        .elements
        .iter()
        .filter(|element| element.det() < 0.0)
        .filter_map(|element| {
            // A reflection is ((cos 2a, sin 2a), (sin 2a, -cos 2a)), a being the angle of its axis.
            let angle = 0.5 * element.matrix[(1, 0)].atan2(element.matrix[(0, 0)]);
            let direction = Vec2::new(angle.cos(), angle.sin());
            let (low, high) = crossings(&outline, symmetry.center, direction)?;
            let beyond = OVERHANG * domain.size;
            Some((
                symmetry.center + direction * (low - beyond),
                symmetry.center + direction * (high + beyond),
            ))
        })
        .collect()
}

/// First and last place, along a line through `center`, at which a chain of points crosses or touches it.
fn crossings(chain: &[Vec2], center: Vec2, direction: Vec2) -> Option<(f64, f64)> {
    let mut ends: Option<(f64, f64)> = None;
    for index in 0..chain.len() {
        let (a, b) = (
            chain[index] - center,
            chain[(index + 1) % chain.len()] - center,
        );
        let (side_a, side_b) = (cross(direction, a), cross(direction, b));
        if side_a * side_b > 0.0 {
            continue;
        }
        let share = if side_a == side_b {
            0.0
        } else {
            side_a / (side_a - side_b)
        };
        let along = (a + (b - a) * share).dot(&direction);
        ends = Some(ends.map_or((along, along), |(low, high)| {
            (low.min(along), high.max(along))
        }));
    }
    ends
}

/// Does the group have rotations but no axes, so that its centre must be shown by itself?
fn has_center(symmetry: &Symmetry) -> bool {
    symmetry.order() > 1 && symmetry.elements.iter().all(|element| element.det() > 0.0)
}

fn entries(domain: &Domain, symmetry: &Symmetry) -> Vec<Entry> {
    let wall = |condition| domain.walls.iter().any(|wall| wall.condition == condition);
    let vertex = |wanted| {
        domain
            .vertices
            .iter()
            .any(|vertex| mark(vertex.kind) == Some(wanted))
    };
    let reflects = symmetry.elements.iter().any(|element| element.det() < 0.0);
    let hole = domain.loops.iter().any(|chain| chain.role == Role::Hole);
    [
        (
            wall(Condition::Dirichlet),
            Sample::Line(DIRICHLET),
            "Dirichlet wall",
        ),
        (
            wall(Condition::Neumann),
            Sample::Line(NEUMANN),
            "Neumann wall",
        ),
        (reflects, Sample::Line(AXIS), "axis of symmetry"),
        (
            has_center(symmetry),
            Sample::Mark(Mark::Cross),
            "centre of rotation",
        ),
        (
            vertex(Mark::Circle),
            Sample::Mark(Mark::Circle),
            "corner that diffracts",
        ),
        (
            vertex(Mark::Square),
            Sample::Mark(Mark::Square),
            "corner \u{3c0}/n, regular",
        ),
        (
            vertex(Mark::Stroke),
            Sample::Mark(Mark::Stroke),
            "joint (curvature jumps)",
        ),
        (hole, Sample::Area(HOLE), "hole"),
    ]
    .into_iter()
    .filter(|(shown, ..)| *shown)
    .map(|(_, sample, text)| (sample, text.to_owned()))
    .collect()
}

fn facts(domain: &Domain, symmetry: &Symmetry, length_unit: Option<&str>) -> String {
    let (length, area) = length_unit.map_or((String::new(), String::new()), |unit| {
        (format!(" {unit}"), format!(" {unit}\u{b2}"))
    });
    format!(
        "area {}{area}, perimeter {}{length}, walls {}, symmetry: {}",
        rounded(domain.area),
        rounded(domain.perimeter),
        domain.walls.len(),
        symmetry.name
    )
}

fn description(domain: &Domain, symmetry: &Symmetry) -> String {
    let count = |wanted| {
        domain
            .vertices
            .iter()
            .filter(|vertex| mark(vertex.kind) == Some(wanted))
            .count()
    };
    format!(
        "Outline of the domain: {}; corners that diffract {}, regular corners {}, joints {}.",
        facts(domain, symmetry, None),
        count(Mark::Circle),
        count(Mark::Square),
        count(Mark::Stroke)
    )
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::super::testing::{
        cardioid, checked, keep, mixed_polygon, rectangle_group, ring, slit_square, stadium,
    };
    use super::*;

    #[test]
    fn pictures_are_well_formed_and_repeatable() {
        for (name, domain, symmetry) in [
            ("stadium", stadium(), rectangle_group()),
            ("ring", ring(), Symmetry::trivial()),
            ("slit", slit_square(), Symmetry::trivial()),
            ("mixed", mixed_polygon(), Symmetry::trivial()),
            ("cardioid", cardioid(), Symmetry::trivial()),
        ] {
            let picture = shape_picture(&domain, &symmetry, name, Some("mm"));
            keep(&format!("shape-{name}"), &picture);
            let texts = checked(&picture);
            assert!(texts.iter().any(|text| text == "x (mm)"));
            assert_eq!(picture, shape_picture(&domain, &symmetry, name, Some("mm")));
            assert!(picture.len() < 60_000, "{}", picture.len());
        }
    }

    #[test]
    fn only_what_is_there_is_in_the_legend() {
        let texts = checked(&shape_picture(
            &stadium(),
            &rectangle_group(),
            "stadium",
            None,
        ))
        .concat();
        assert!(
            texts.contains("Dirichlet wall")
                && texts.contains("joint")
                && texts.contains("axis of symmetry")
        );
        assert!(
            !texts.contains("Neumann")
                && !texts.contains("hole")
                && !texts.contains("that diffractsc")
        );
        let texts = checked(&shape_picture(
            &mixed_polygon(),
            &Symmetry::trivial(),
            "mixed",
            None,
        ))
        .concat();
        assert!(
            texts.contains("Neumann wall") && texts.contains("hole") && texts.contains("\u{3c0}/2")
        );
        assert!(!texts.contains("axis of"));
    }

    #[test]
    fn axes_run_through_the_stadium() {
        let mut axes = reflection_axes(&stadium(), &rectangle_group());
        let beyond = OVERHANG * stadium().size;
        for (from, to) in &mut axes {
            if from.x + from.y > to.x + to.y {
                std::mem::swap(from, to);
            }
        }
        let expected = [
            (Vec2::new(0.0, -1.0 - beyond), Vec2::new(0.0, 1.0 + beyond)),
            (Vec2::new(-2.0 - beyond, 0.0), Vec2::new(2.0 + beyond, 0.0)),
        ];
        assert_eq!(axes.len(), 2);
        for (axis, expected) in axes.iter().zip(&expected) {
            assert!((axis.0 - expected.0).norm() < 1e-12 && (axis.1 - expected.1).norm() < 1e-12);
        }
    }

    #[test]
    fn titles_are_escaped() {
        let texts = checked(&shape_picture(
            &ring(),
            &Symmetry::trivial(),
            "a<b> & c",
            Some("\""),
        ));
        assert!(texts.contains(&"a&lt;b&gt; &amp; c".to_owned()));
    }
}
