//! Which integrable shape a domain is.

use super::{Integrable, conic};
use crate::billiard::{Arc, Condition, Domain, Role, Shape, Vec2, Wall, WallLoop};
use std::f64::consts::PI;

/// Relative difference of lengths, and difference of angles (radians), below which they are equal. Files are written with ten digits
/// or more.
const SAME: f64 = 1e-9;

/// A closed loop that is a circle.
#[derive(Clone, Copy)]
struct Circle {
    center: Vec2,
    radius: f64,
    condition: Condition,
}

/// The integrable shape that a domain is, if it is one: disk, annulus, circular sector (also the half disk, with one
/// straight wall or two), ellipse.
///
/// Circles may be given as arcs or as curves, in one piece or several, with one condition on each circle.
#[must_use]
pub fn recognise(domain: &Domain) -> Option<Integrable> {
    match domain.loops.as_slice() {
        [outline] => recognise_outline(&domain.walls[outline.walls.clone()]),
        [outline, hole] if hole.role == Role::Hole => annulus(domain, outline, hole),
        _ => None,
    }
}

fn recognise_outline(walls: &[Wall]) -> Option<Integrable> {
    if let Some(circle) = circle(walls) {
        return Some(Integrable::Disk {
            radius: circle.radius,
            condition: circle.condition,
        });
    }
    if walls.iter().any(Wall::is_straight) {
        return sector(walls);
    }
    let condition = common_condition(walls)?;
    let conic = conic::fit(walls)?;
    Some(Integrable::Ellipse {
        long: conic.long,
        short: conic.short,
        condition,
    })
}

fn annulus(domain: &Domain, outline: &WallLoop, hole: &WallLoop) -> Option<Integrable> {
    let outer = circle(&domain.walls[outline.walls.clone()])?;
    let inner = circle(&domain.walls[hole.walls.clone()])?;
    let concentric = (outer.center - inner.center).norm() <= SAME * outer.radius;
    (concentric && inner.radius < outer.radius).then_some(Integrable::Annulus {
        outer_radius: outer.radius,
        inner_radius: inner.radius,
        outer: outer.condition,
        inner: inner.condition,
    })
}

/// The condition that all walls share.
fn common_condition(walls: &[Wall]) -> Option<Condition> {
    let condition = walls.first()?.condition;
    walls
        .iter()
        .all(|wall| wall.condition == condition)
        .then_some(condition)
}

fn circle(walls: &[Wall]) -> Option<Circle> {
    if walls.iter().any(Wall::is_straight) {
        return None;
    }
    let condition = common_condition(walls)?;
    let conic = conic::fit(walls)?;
    // An arc knows its circle to the last digit.
    let (center, radius) = match walls.first()?.shape {
        Shape::Arc(arc) => (arc.center, arc.radius),
        _ => (conic.center, (conic.long * conic.short).sqrt()),
    };
    conic.is_circle().then_some(Circle {
        center,
        radius,
        condition,
    })
}

fn sector(walls: &[Wall]) -> Option<Integrable> {
    let (straight, curved): (Vec<Wall>, Vec<Wall>) =
        walls.iter().cloned().partition(Wall::is_straight);
    let arc = joined_arc(&curved)?;
    let opening = arc.sweep;
    if opening >= 2.0 * PI - SAME {
        return None;
    }
    let ray = |angle: f64| Vec2::new(angle.cos(), angle.sin());
    let rays = [ray(arc.from + arc.sweep), ray(arc.from)];
    let mut found: [Option<Condition>; 2] = [None, None];
    for wall in &straight {
        let sides =
            [wall.start(), wall.end()].map(|end| side_of((end - arc.center) / arc.radius, rays));
        for side in sides {
            if let Some(side) = side?
                && *found[side].get_or_insert(wall.condition) != wall.condition
            {
                return None;
            }
        }
        // From one ray to the other a wall passes through the centre only on a diameter.
        let crosses = matches!(sides, [Some(Some(a)), Some(Some(b))] if a != b);
        if crosses && (opening - PI).abs() > SAME {
            return None;
        }
    }
    Some(Integrable::Sector {
        radius: arc.radius,
        opening,
        arc: common_condition(&curved)?,
        radial: [found[0]?, found[1]?],
    })
}

/// Which ray a point (relative to the centre) lies on: Some(None) at the centre itself, None if on neither.
fn side_of(point: Vec2, rays: [Vec2; 2]) -> Option<Option<usize>> {
    if point.norm() <= SAME {
        return Some(None);
    }
    rays.iter()
        .position(|ray| (point - ray * point.norm()).norm() <= SAME)
        .map(Some)
}

/// One arc made of all the given ones, which follow each other in the outline in this cyclic order.
fn joined_arc(walls: &[Wall]) -> Option<Arc> {
    let arcs: Vec<Arc> = walls
        .iter()
        .map(|wall| match wall.shape {
            Shape::Arc(arc) => Some(arc),
            _ => None,
        })
        .collect::<Option<_>>()?;
    let first = *arcs.first()?;
    let alike = |arc: &Arc| {
        arc.sweep > 0.0
            && (arc.center - first.center).norm() <= SAME * first.radius
            && (arc.radius - first.radius).abs() <= SAME * first.radius
    };
    if !arcs.iter().all(alike) {
        return None;
    }
    // The first piece is the one that no other piece ends at.
    let begins = |arc: &Arc| arc.center + Vec2::new(arc.from.cos(), arc.from.sin()) * arc.radius;
    let ends = |arc: &Arc| {
        let angle = arc.from + arc.sweep;
        arc.center + Vec2::new(angle.cos(), angle.sin()) * arc.radius
    };
    let starts: Vec<&Arc> = arcs
        .iter()
        .filter(|arc| {
            arcs.iter()
                .all(|other| (ends(other) - begins(arc)).norm() > SAME * first.radius)
        })
        .collect();
    let [start] = starts.as_slice() else {
        return None;
    };
    Some(Arc {
        sweep: arcs.iter().map(|arc| arc.sweep).sum(),
        ..**start
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::billiard::Condition::{Dirichlet, Neumann};
    use crate::billiard::{Curve, Line, PlaneCurve};
    use std::sync::Arc as Shared;

    /// Ellipse about (0.3, -0.2), turned by 0.4, with an optional bump.
    #[derive(Debug)]
    struct Oval {
        axes: (f64, f64),
        bump: f64,
    }

    impl PlaneCurve for Oval {
        fn derivatives(&self, u: f64) -> [Vec2; 4] {
            let (sin, cos) = u.sin_cos();
            let (tilt_sin, tilt_cos) = 0.4_f64.sin_cos();
            let turn = |x: f64, y: f64| {
                Vec2::new(tilt_cos * x - tilt_sin * y, tilt_sin * x + tilt_cos * y)
            };
            let (a, b) = self.axes;
            let third = self.bump * (3.0 * u).cos();
            let third_slope = -3.0 * self.bump * (3.0 * u).sin();
            [
                Vec2::new(0.3, -0.2) + turn(a * cos + third, b * sin),
                turn(-a * sin + third_slope, b * cos),
                turn(-a * cos - 9.0 * third, -b * sin),
                turn(a * sin - 9.0 * third_slope, -b * cos),
            ]
        }
    }

    fn oval(axes: (f64, f64), bump: f64) -> Domain {
        let curve = Curve {
            source: Shared::new(Oval { axes, bump }),
            from: 0.0,
            to: 2.0 * PI,
        };
        domain(vec![(
            Role::Outer,
            vec![Wall::new(Shape::Curve(curve), Dirichlet)],
        )])
    }

    fn domain(chains: Vec<(Role, Vec<Wall>)>) -> Domain {
        Domain::new(chains).expect("valid domain")
    }

    fn arc(radius: f64, from: f64, sweep: f64, condition: Condition) -> Wall {
        let center = Vec2::new(1.0, 2.0);
        Wall::new(
            Shape::Arc(Arc {
                center,
                radius,
                from,
                sweep,
            }),
            condition,
        )
    }

    /// Line between points given in polar coordinates about the arcs' centre.
    fn line(start: (f64, f64), end: (f64, f64), condition: Condition) -> Wall {
        let at = |(r, angle): (f64, f64)| Vec2::new(1.0 + r * angle.cos(), 2.0 + r * angle.sin());
        Wall::new(
            Shape::Line(Line {
                start: at(start),
                end: at(end),
            }),
            condition,
        )
    }

    #[test]
    fn circles_in_one_piece_or_several() {
        let whole = domain(vec![(Role::Outer, vec![arc(1.5, 0.3, 2.0 * PI, Neumann)])]);
        let pieces = vec![
            arc(1.5, 0.0, 4.0, Neumann),
            arc(1.5, 4.0, 2.0 * PI - 4.0, Neumann),
        ];
        let disk = Some(Integrable::Disk {
            radius: 1.5,
            condition: Neumann,
        });
        assert_eq!(recognise(&whole), disk);
        assert_eq!(recognise(&domain(vec![(Role::Outer, pieces)])), disk);
        let mixed = vec![
            arc(1.5, 0.0, 4.0, Neumann),
            arc(1.5, 4.0, 2.0 * PI - 4.0, Dirichlet),
        ];
        assert_eq!(recognise(&domain(vec![(Role::Outer, mixed)])), None);
        assert!(matches!(
            recognise(&oval((0.7, 0.7), 0.0)),
            Some(Integrable::Disk { radius, .. }) if (radius - 0.7).abs() < 1e-12
        ));
    }

    #[test]
    fn annulus_must_be_concentric() {
        let ring = |shift: f64| {
            let mut inner = arc(0.5, 0.0, 2.0 * PI, Dirichlet);
            if let Shape::Arc(arc) = &mut inner.shape {
                arc.center.x += shift;
            }
            recognise(&domain(vec![
                (Role::Outer, vec![arc(1.5, 0.0, 2.0 * PI, Neumann)]),
                (Role::Hole, vec![inner]),
            ]))
        };
        let expected = Integrable::Annulus {
            outer_radius: 1.5,
            inner_radius: 0.5,
            outer: Neumann,
            inner: Dirichlet,
        };
        assert_eq!(ring(0.0), Some(expected));
        assert_eq!(ring(1e-6), None);
    }

    #[test]
    fn sectors_of_any_opening() {
        for opening in [0.5, 2.0, PI, 4.0] {
            let walls = vec![
                line((0.0, 0.0), (2.0, 0.1), Neumann),
                arc(2.0, 0.1, 0.3 * opening, Dirichlet),
                arc(2.0, 0.1 + 0.3 * opening, 0.7 * opening, Dirichlet),
                line((2.0, 0.1 + opening), (0.7, 0.1 + opening), Dirichlet),
                line((0.7, 0.1 + opening), (0.0, 0.0), Dirichlet),
            ];
            let found = recognise(&domain(vec![(Role::Outer, walls)]));
            let Some(Integrable::Sector {
                radius,
                opening: angle,
                arc,
                radial,
            }) = found
            else {
                panic!("{opening}: {found:?}");
            };
            assert!((angle - opening).abs() < 1e-12 && radius == 2.0);
            assert_eq!((arc, radial), (Dirichlet, [Dirichlet, Neumann]));
        }
    }

    #[test]
    fn half_disk_with_one_straight_wall() {
        let walls = vec![
            arc(1.0, 0.0, PI, Neumann),
            line((1.0, PI), (1.0, 0.0), Dirichlet),
        ];
        let found = recognise(&domain(vec![(Role::Outer, walls)]));
        assert!(
            matches!(
                found,
                Some(Integrable::Sector {
                    arc: Neumann,
                    radial: [Dirichlet, Dirichlet],
                    ..
                })
            ),
            "{found:?}"
        );
    }

    #[test]
    fn other_shapes_with_an_arc_are_none() {
        // A circular segment, and a half disk whose condition changes away from the centre.
        let segment = vec![
            arc(1.0, 0.0, 2.5, Dirichlet),
            line((1.0, 2.5), (1.0, 0.0), Dirichlet),
        ];
        let changed = vec![
            arc(1.0, 0.0, PI, Dirichlet),
            line((1.0, PI), (0.4, 0.0), Dirichlet),
            line((0.4, 0.0), (1.0, 0.0), Neumann),
        ];
        for walls in [segment, changed] {
            assert_eq!(recognise(&domain(vec![(Role::Outer, walls)])), None);
        }
    }

    #[test]
    fn ellipses_are_told_from_ovals() {
        for axes in [(1.0, 0.8), (0.3, 2.0), (1.0, 0.05), (1.0, 1.0 - 1e-6)] {
            let found = recognise(&oval(axes, 0.0));
            let Some(Integrable::Ellipse { long, short, .. }) = found else {
                panic!("{axes:?}: {found:?}");
            };
            assert!((long / axes.0.max(axes.1) - 1.0).abs() < 1e-10, "{long}");
            assert!((short / axes.0.min(axes.1) - 1.0).abs() < 1e-10, "{short}");
        }
        assert_eq!(recognise(&oval((1.0, 0.8), 1e-8)), None);
    }
}
