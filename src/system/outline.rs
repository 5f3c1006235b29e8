//! Reads outline, holes and slits and puts the domain together.

use super::error::{Problem, SystemError};
use super::formula::Span;
use super::reader::{Reader, Table, Value, span, tables};
use super::walls::{self, ROUNDING, WallReader};
use crate::billiard::{Condition, Domain, GeometryError, Role, Vec2, Wall, signed_area};
use std::path::Path;

/// Keys of an outline, a hole or a slit.
const KEYS: &[&str] = &["start", "condition", "wall"];

/// An outline encloses something if its area is larger than this fraction of the square of its size.
const AREA: f64 = 1e-12;

/// A closed chain of walls with the place of each.
struct Chain {
    role: Role,
    walls: Vec<Wall>,
    spans: Vec<Span>,
}

/// The domain, and the place of each of its walls.
pub(super) struct Drawn {
    pub(super) domain: Domain,
    pub(super) spans: Vec<Span>,
}

/// Reads `[outline]`, `[[hole]]` and `[[slit]]`.
pub(super) fn read(
    top: Table<'_>,
    reader: Reader<'_>,
    folder: &Path,
) -> Result<Drawn, SystemError> {
    let outline = top.require("outline", "[outline] with the walls of the shape")?;
    let outline = Table::of(outline, "[outline]", KEYS)?;
    let mut chains = vec![chain(outline, Role::Outer, reader, folder)?];
    for (key, title, role) in [
        ("hole", "[[hole]]", Role::Hole),
        ("slit", "[[slit]]", Role::Slit),
    ] {
        if let Some(value) = top.get(key) {
            for table in tables(value, title, title, KEYS)? {
                chains.push(chain(table, role, reader, folder)?);
            }
        }
    }
    assemble(chains)
}

fn chain(
    table: Table<'_>,
    role: Role,
    reader: Reader<'_>,
    folder: &Path,
) -> Result<Chain, SystemError> {
    let start = table
        .get("start")
        .map(|value| Ok((span(value), reader.point(value, "start")?)))
        .transpose()?;
    let list = wall_tables(table)?;
    let wall_reader = WallReader {
        reader,
        folder,
        condition: walls::condition(table, Condition::Dirichlet)?,
        alone: list.len() == 1 && role != Role::Slit,
    };
    let mut chain = Chain {
        role,
        walls: Vec::new(),
        spans: Vec::new(),
    };
    let mut pen = start.map(|(_, point)| point);
    for table in list {
        for wall in wall_reader.read(table, pen)? {
            pen = Some(wall.end());
            chain.walls.push(wall);
            chain.spans.push(table.span);
        }
    }
    if let (Some((place, start)), Some(first)) = (start, chain.walls.first()) {
        let begins = first.start();
        if (begins - start).norm() > ROUNDING * size(&chain.walls) {
            let wall = begins;
            return Err(SystemError::at(place, Problem::Start { start, wall }));
        }
    }
    finish(chain, table.span)
}

fn wall_tables<'t>(table: Table<'t>) -> Result<Vec<Table<'t>>, SystemError> {
    const EXAMPLE: &str = "wall = [ { line = [1, 0] }, ... ]";
    let value: Value<'t> = table.require("wall", EXAMPLE)?;
    let list = tables(value, "`wall`", "a wall", walls::KEYS)?;
    if list.is_empty() {
        let problem = Problem::Missing {
            key: "wall",
            table: table.title,
            example: EXAMPLE,
        };
        return Err(SystemError::at(span(value), problem));
    }
    Ok(list)
}

/// Largest distance of the walls' ends and middles from the first point: a size that rounding is relative to.
fn size(walls: &[Wall]) -> f64 {
    let first = walls.first().map_or_else(Vec2::zeros, Wall::start);
    walls
        .iter()
        .flat_map(|wall| {
            let extent = wall.extent();
            [0.25, 0.5, 0.75, 1.0].map(|part| (wall.point(part * extent) - first).norm())
        })
        .fold(0.0, f64::max)
}

/// Turns holes clockwise and doubles slits.
fn finish(mut chain: Chain, place: Span) -> Result<Chain, SystemError> {
    if chain.role == Role::Slit {
        let ends = (chain.walls.first(), chain.walls.last());
        if let (Some(first), Some(last)) = ends
            && (first.start() - last.end()).norm() <= ROUNDING * size(&chain.walls)
        {
            return Err(SystemError::at(place, Problem::ClosedSlit));
        }
        let back: Vec<Wall> = chain.walls.iter().rev().map(Wall::reversed).collect();
        let spans: Vec<Span> = chain.spans.iter().rev().copied().collect();
        chain.walls.extend(back);
        chain.spans.extend(spans);
        return Ok(chain);
    }
    let area = signed_area(&chain.walls);
    if area.abs() <= AREA * size(&chain.walls).powi(2) && closes(&chain.walls) {
        return Err(SystemError::at(place, Problem::NoArea));
    }
    if chain.role == Role::Hole && area > 0.0 {
        chain.walls = chain.walls.iter().rev().map(Wall::reversed).collect();
        chain.spans.reverse();
    }
    Ok(chain)
}

fn closes(walls: &[Wall]) -> bool {
    let next = walls.iter().cycle().skip(1);
    walls
        .iter()
        .zip(next)
        .all(|(wall, next)| (wall.end() - next.start()).norm() <= ROUNDING * size(walls))
}

fn assemble(chains: Vec<Chain>) -> Result<Drawn, SystemError> {
    let mut spans = Vec::new();
    let mut lasts = Vec::new();
    let mut parts = Vec::new();
    for mut chain in chains {
        let first = spans.len();
        let count = chain.walls.len();
        if chain.role == Role::Slit {
            for (offset, wall) in chain.walls.iter_mut().enumerate() {
                wall.twin = Some(first + count - 1 - offset);
            }
        }
        spans.extend(chain.spans);
        lasts.push(spans.len() - 1);
        parts.push((chain.role, chain.walls));
    }
    match Domain::new(parts) {
        Ok(domain) => Ok(Drawn { domain, spans }),
        Err(GeometryError::Open { wall, start, end }) if !lasts.contains(&wall) => {
            let next = spans.get(wall + 1).copied().unwrap_or(Span::new(0, 0));
            Err(SystemError::at(next, Problem::Gap { start, end }))
        }
        Err(error) => Err(locate(&error, &spans)),
    }
}

/// A geometry error at the place of its wall.
pub(super) fn locate(error: &GeometryError, spans: &[Span]) -> SystemError {
    let wall = match error {
        GeometryError::Open { wall, .. }
        | GeometryError::NoLength { wall }
        | GeometryError::Clockwise { wall }
        | GeometryError::Crossing { wall, .. }
        | GeometryError::Outside { wall }
        | GeometryError::Irregular { wall, .. } => *wall,
    };
    let place = |wall: usize| spans.get(wall).copied().unwrap_or(Span::new(0, 0));
    let located = SystemError::at(place(wall), Problem::Geometry(error.clone()));
    match error {
        GeometryError::Crossing { other, .. } if place(*other) != place(wall) => {
            located.beside(place(*other), "the other wall")
        }
        GeometryError::Crossing { wall, other, at } if wall == other => {
            SystemError::at(place(*wall), Problem::CrossesItself { at: *at })
        }
        _ => located,
    }
}
