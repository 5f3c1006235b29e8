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
    walls.iter().all(|wall| wall.condition == condition).then_some(condition)
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
    let (straight, curved): (Vec<Wall>, Vec<Wall>) = walls.iter().cloned().partition(Wall::is_straight);
    let arc = joined_arc(&curved)?;
    let opening = arc.sweep;
    if opening >= 2.0 * PI - SAME {
        return None;
    }
    let ray = |angle: f64| Vec2::new(angle.cos(), angle.sin());
    let rays = [ray(arc.from + arc.sweep), ray(arc.from)];
    let mut found: [Option<Condition>; 2] = [None, None];
    for wall in &straight {
        let sides = [wall.start(), wall.end()].map(|end| side_of((end - arc.center) / arc.radius, rays));
        for side in sides {
            if let Some(side) = side? {
                if *found[side].get_or_insert(wall.condition) != wall.condition {
                    return None;
                }
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
        .filter(|arc| arcs.iter().all(|other| (ends(other) - begins(arc)).norm() > SAME * first.radius))
        .collect();
    let [start] = starts.as_slice() else {
        return None;
    };
    Some(Arc {
        sweep: arcs.iter().map(|arc| arc.sweep).sum(),
        ..**start
    })
}
