//! Distance of a point from the walls of a domain.

use crate::billiard::{Condition, Domain, Frame, Shape, Vec2, Wall, cross};

/// Pieces into which a curve is cut for the search of foot points.
const PIECES: usize = 64;
/// Newton steps for a foot point; three suffice from a neighbouring piece, a cusp needs a few more.
const NEWTON_STEPS: usize = 12;
/// Rounding of a length, relative.
const ROUNDING: f64 = 1e-12;
/// A foot point that moves by less than this fraction of the curve's parameter range has arrived.
const ARRIVED: f64 = 1e-15;

/// A disk around one piece of a curve.
struct Piece {
    from: f64,
    to: f64,
    middle: Vec2,
    radius: f64,
}

/// A disk around one wall.
struct Disk {
    wall: usize,
    middle: Vec2,
    radius: f64,
}

/// The walls of a domain with what makes distances quick: a disk around each wall, sorted along x, and around each piece
/// of a curve.
pub(crate) struct Boundary<'a> {
    domain: &'a Domain,
    disks: Vec<Disk>,
    largest_radius: f64,
    pieces: Vec<Vec<Piece>>,
}

impl<'a> Boundary<'a> {
    pub(crate) fn new(domain: &'a Domain) -> Self {
        let pieces: Vec<Vec<Piece>> = domain.walls.iter().map(cut).collect();
        let mut disks: Vec<Disk> = domain
            .walls
            .iter()
            .zip(&domain.lengths)
            .enumerate()
            .map(|(index, (wall, length))| {
                // No point of a line or an arc is farther from its middle than half of its length.
                let part = match wall.shape {
                    Shape::Curve(_) => 1.0,
                    _ => 0.5,
                };
                Disk {
                    wall: index,
                    middle: wall.point(0.5 * wall.extent()),
                    radius: part * length * (1.0 + ROUNDING),
                }
            })
            .collect();
        disks.sort_by(|a, b| a.middle.x.total_cmp(&b.middle.x));
        let largest_radius = disks.iter().map(|disk| disk.radius).fold(0.0, f64::max);
        Self {
            domain,
            disks,
            largest_radius,
            pieces,
        }
    }

    /// Frame at the nearest point within `limit` on the walls that `admits` accepts (by condition and frame).
    pub(crate) fn nearest(
        &self,
        point: Vec2,
        limit: f64,
        admits: impl Fn(Condition, &Frame) -> bool,
    ) -> Option<Frame> {
        let mut best = None;
        let mut reach = limit;
        let first = self
            .disks
            .partition_point(|disk| disk.middle.x < point.x - limit - self.largest_radius);
        for disk in &self.disks[first..] {
            if disk.middle.x > point.x + reach + self.largest_radius {
                break;
            }
            if (point - disk.middle).norm() > reach + disk.radius {
                continue;
            }
            let (index, wall) = (disk.wall, &self.domain.walls[disk.wall]);
            for frame in self.feet(index, wall, point, reach) {
                let distance = (frame.point - point).norm();
                if distance <= reach && admits(wall.condition, &frame) {
                    reach = distance;
                    best = Some(frame);
                }
            }
        }
        best
    }

    /// Frames at the candidates for the nearest point of one wall.
    fn feet(&self, index: usize, wall: &Wall, point: Vec2, reach: f64) -> Vec<Frame> {
        match &wall.shape {
            Shape::Line(line) => {
                let tangent = (line.end - line.start) / wall.extent();
                let t = (point - line.start).dot(&tangent);
                vec![wall.frame(t.clamp(0.0, wall.extent()))]
            }
            Shape::Arc(arc) => {
                let radial = point - arc.center;
                let turn = arc.sweep.signum();
                let angle = (radial.y.atan2(radial.x) - arc.from) * turn;
                let t = angle.rem_euclid(2.0 * std::f64::consts::PI) * arc.radius;
                if t <= wall.extent() {
                    vec![wall.frame(t)]
                } else {
                    vec![wall.frame(0.0), wall.frame(wall.extent())]
                }
            }
            Shape::Curve(_) => self.pieces[index]
                .iter()
                .filter(|piece| (point - piece.middle).norm() <= reach + piece.radius)
                .map(|piece| foot_on_piece(wall, piece, point))
                .collect(),
        }
    }
}

fn cut(wall: &Wall) -> Vec<Piece> {
    if !matches!(wall.shape, Shape::Curve(_)) {
        return Vec::new();
    }
    let step = wall.extent() / PIECES as f64;
    (0..PIECES)
        .map(|i| {
            let (from, to) = (i as f64 * step, (i + 1) as f64 * step);
            let length =
                crate::billiard::quadrature::integrate(from, to, 1, |t| wall.frame(t).speed);
            Piece {
                from,
                to,
                middle: wall.point(0.5 * (from + to)),
                radius: length,
            }
        })
        .collect()
}

/// Gauss-Newton steps for (c(t) - p) . c'(t) = 0 from the middle of a piece, kept on the piece.
fn foot_on_piece(wall: &Wall, piece: &Piece, point: Vec2) -> Frame {
    let mut t = 0.5 * (piece.from + piece.to);
    for _ in 0..NEWTON_STEPS {
        let frame = wall.frame(t);
        let along = (frame.point - point).dot(&frame.tangent);
        // Far from the curve the full Newton step, with the curvature, would be better; here only points on the curve matter.
        let step = along / frame.speed;
        let next = if step.is_finite() { t - step } else { t };
        let next = next.clamp(piece.from, piece.to);
        if (next - t).abs() <= ARRIVED * wall.extent() {
            break;
        }
        t = next;
    }
    wall.frame(t)
}

/// Are two unit tangents the same within an angle given by its sine?
pub(crate) fn same_direction(a: Vec2, b: Vec2, sine: f64) -> bool {
    a.dot(&b) > 0.0 && cross(a, b).abs() < sine
}
