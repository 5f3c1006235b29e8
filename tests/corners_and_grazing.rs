//! What the bounce map does at its edges: corners, joints, rays along walls and tangent rays.

use orbitsum::billiard::{Condition, Domain, Event, Hit, Origin, Ray, Tracer, Vec2};
use std::f64::consts::PI;

#[path = "common/shapes.rs"]
mod shapes;
use shapes::{D, N, arc, circle, domain, line, point, polygon_walls, with_hole};

fn from_inside(start: Vec2, towards: Vec2) -> Ray {
    Ray {
        point: start,
        direction: (towards - start).normalize(),
        origin: Origin::Inside,
    }
}

fn wall_hit(event: &Event) -> Hit {
    match event {
        Event::Wall(hit) => *hit,
        other => panic!("{other:?} is not a hit of a wall"),
    }
}

/// A sector of a disk around the corner (0, 0) with an opening pi/n, bounded by a straight wall on the far side.
fn wedge(n: u32, conditions: [Condition; 2]) -> Domain {
    let opening = PI / f64::from(n);
    let far = point(2.0 * opening.cos(), 2.0 * opening.sin());
    let corners = [point(0.0, 0.0), point(2.0, 0.0), far];
    domain(polygon_walls(&corners, &[conditions[0], D, conditions[1]]))
}

/// Direction of a ray after it has left the corner, followed through its ordinary reflections.
fn leaves_along(tracer: &Tracer, mut ray: Ray, reach: f64) -> (Vec2, u32) {
    let mut reflections = 0;
    loop {
        let hit = wall_hit(&tracer.next(&ray));
        if hit.point.norm() > reach {
            return (ray.direction, reflections);
        }
        ray = Tracer::reflect(ray.direction, &hit);
        reflections += 1;
    }
}

/// A ray into a corner of angle pi/n goes on as the rays that pass it closely on either side do, after as many reflections.
#[test]
fn regular_corners_continue_like_nearby_rays() {
    for (n, conditions) in [
        (2, [D, D]),
        (2, [D, N]),
        (3, [D, D]),
        (3, [N, N]),
        (4, [D, D]),
        (4, [N, D]),
        (6, [D, N]),
    ] {
        let domain = wedge(n, conditions);
        let tracer = Tracer::new(&domain);
        let opening = PI / f64::from(n);
        for part in [0.1, 0.37, 0.5, 0.8] {
            let angle = part * opening;
            let start = point(angle.cos(), angle.sin()) * 0.5;
            let event = tracer.next(&from_inside(start, point(0.0, 0.0)));
            let Event::Corner { vertex, hit } = event else {
                panic!("{event:?} is not the corner");
            };
            assert_eq!(vertex, 0);
            assert!(hit.point.norm() < 1e-12 && (hit.distance - 0.5).abs() < 1e-12);
            let (next, count) = tracer
                .pass_corner(-start.normalize(), vertex, hit.point)
                .expect("a regular corner");
            assert_eq!(count, n);
            assert_eq!(next.origin, Origin::Vertex(0));
            for side in [1e-6, -1e-6] {
                let beside = point(-angle.sin(), angle.cos()) * side;
                let nearby = from_inside(start, beside);
                let (direction, reflections) = leaves_along(&tracer, nearby, 1e-3);
                assert!((direction - next.direction).norm() < 1e-5, "pi/{n}, {part}");
                assert_eq!(reflections, n, "pi/{n}, {part}");
            }
            // The ray that goes on meets a wall again as the nearby ones do.
            assert!(wall_hit(&tracer.next(&next)).point.norm() > 0.5);
        }
    }
}

/// Corners of other angles, odd corners between unlike walls, and changes of condition on a straight wall end the ray.
#[test]
fn other_corners_stop_rays() {
    let odd = wedge(3, [D, N]);
    let tracer = Tracer::new(&odd);
    let event = tracer.next(&from_inside(point(0.5, 0.3), point(0.0, 0.0)));
    let Event::Corner { vertex, hit } = event else {
        panic!("{event:?}");
    };
    assert!(
        tracer
            .pass_corner(point(-1.0, 0.0), vertex, hit.point)
            .is_none()
    );

    let corners = [
        point(0.0, 0.0),
        point(1.0, 0.0),
        point(2.0, 0.0),
        point(2.0, 1.0),
        point(0.0, 1.3),
    ];
    let shape = domain(polygon_walls(&corners, &[D, N, N, N, N]));
    let tracer = Tracer::new(&shape);
    for (vertex, target) in [(1, corners[1]), (3, corners[3]), (4, corners[4])] {
        let event = tracer.next(&from_inside(point(0.7, 0.4), target));
        let Event::Corner { vertex: found, hit } = event else {
            panic!("{event:?}");
        };
        assert_eq!(found, vertex);
        assert!(
            tracer
                .pass_corner(point(1.0, 0.0), found, hit.point)
                .is_none()
        );
    }
}

/// A ray along a wall runs to the wall's end; one into a right angle there comes back along the wall.
#[test]
fn rays_along_walls() {
    let square = domain(polygon_walls(
        &[
            point(0.0, 0.0),
            point(1.0, 0.0),
            point(1.0, 1.0),
            point(0.0, 1.0),
        ],
        &[D],
    ));
    let tracer = Tracer::new(&square);
    let ray = Ray {
        point: point(0.25, 0.0),
        direction: point(1.0, 0.0),
        origin: Origin::Wall { wall: 0, t: 0.25 },
    };
    let event = tracer.next(&ray);
    let Event::Corner { vertex, hit } = event else {
        panic!("{event:?}");
    };
    assert_eq!((vertex, hit.distance), (1, 0.75));
    let (back, count) = tracer
        .pass_corner(ray.direction, vertex, hit.point)
        .expect("a right angle");
    assert_eq!(count, 2);
    assert!((back.direction - point(-1.0, 0.0)).norm() < 1e-15);
    // So flat a ray that the wall it came along is not met again near the corner is spared that reflection.
    let flat = point(1.0, 1e-11).normalize();
    let (back, count) = tracer
        .pass_corner(flat, vertex, hit.point)
        .expect("a right angle");
    assert_eq!(count, 1);
    assert!((back.direction - point(-1.0, 1e-11)).norm() < 1e-15);
}

/// A ray that touches a dispersing wall goes on; one that crosses it by a rounding is reflected by it, into almost the same
/// direction.
#[test]
fn tangent_rays_on_dispersing_arcs() {
    let corners = [
        point(-1.0, -1.0),
        point(1.0, -1.0),
        point(1.0, 1.0),
        point(-1.0, 1.0),
    ];
    let sinai = with_hole(
        polygon_walls(&corners, &[D]),
        vec![circle(point(0.0, 0.0), 0.5, D)],
    );
    let annulus = with_hole(
        vec![circle(point(0.0, 0.0), 1.0, D)],
        vec![circle(point(0.0, 0.0), 0.5, D)],
    );
    for shape in [&sinai, &annulus] {
        let tracer = Tracer::new(shape);
        let hole = shape.walls.len() - 1;
        let at_height = |height: f64| Ray {
            point: point(-0.75, height),
            direction: point(1.0, 0.0),
            origin: Origin::Inside,
        };
        for above in [1e-3, 1e-9, 1e-15] {
            assert_ne!(wall_hit(&tracer.next(&at_height(0.5 + above))).wall, hole);
        }
        for below in [1e-3, 1e-9, 1e-15] {
            let hit = wall_hit(&tracer.next(&at_height(0.5 - below)));
            assert_eq!(hit.wall, hole);
            // Depth below the top is below = x^2/(2 r) for the hit at x.
            let x = (2.0 * 0.5 * below).sqrt();
            assert!((hit.point.x + x).abs() < 0.1 * x, "{below}: {hit:?}");
            let next = Tracer::reflect(point(1.0, 0.0), &hit);
            assert!(wall_hit(&tracer.next(&next)).wall != hole);
        }
        // A ray that leaves the hole along its tangent does not meet it again.
        let ray = Ray {
            point: point(0.0, 0.5),
            direction: point(1.0, 0.0),
            origin: Origin::Wall {
                wall: hole,
                t: 0.75 * PI,
            },
        };
        assert_ne!(wall_hit(&tracer.next(&ray)).wall, hole);
    }
}

/// A ray along a straight wall that goes over into a focusing arc is caught at the joint: rays just above it creep along the
/// arc in ever more bounces.
#[test]
fn rays_along_a_wall_into_a_joint() {
    let stadium = domain(vec![
        line(point(-1.0, -1.0), point(1.0, -1.0), D),
        arc(point(1.0, 0.0), 1.0, -90.0, 180.0, D),
        line(point(1.0, 1.0), point(-1.0, 1.0), D),
        arc(point(-1.0, 0.0), 1.0, 90.0, 180.0, D),
    ]);
    let tracer = Tracer::new(&stadium);
    let ray = Ray {
        point: point(-0.3, -1.0),
        direction: point(1.0, 0.0),
        origin: Origin::Wall { wall: 0, t: 0.7 },
    };
    let hit = wall_hit(&tracer.next(&ray));
    assert_eq!(hit.wall, 1);
    assert!((hit.point - point(1.0, -1.0)).norm() < 1e-12);
    let again = wall_hit(&tracer.next(&Tracer::reflect(ray.direction, &hit)));
    assert!(again.wall == 1 && again.distance < 1e-12);
    // At a height h the chords of the arc have half angle acos(1 - h): about pi/(2 sqrt(2 h)) of them fit on it.
    for height in [1e-4_f64, 1e-6] {
        let mut ray = Ray {
            point: point(-0.3, -1.0 + height),
            direction: point(1.0, 0.0),
            origin: Origin::Inside,
        };
        let mut bounces = 0;
        loop {
            let hit = wall_hit(&tracer.next(&ray));
            if hit.wall != 1 {
                break;
            }
            bounces += 1;
            ray = Tracer::reflect(ray.direction, &hit);
        }
        let expected = PI / (2.0 * (1.0 - height).acos());
        assert!(
            (f64::from(bounces) - expected).abs() <= 1.0,
            "{bounces} {expected}"
        );
        // It goes on along the other straight wall.
        assert!((ray.direction - point(-1.0, 0.0)).norm() < 4.0 * height.sqrt());
    }
}
