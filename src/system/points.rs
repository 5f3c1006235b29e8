//! Measured or drawn outlines: tables of points, joined by straight walls.

use super::error::{Problem, Source, SystemError};
use super::formula::Span;
use crate::billiard::{Line, Shape, Vec2};
use std::path::Path;

/// Reads the points of a file: x and y in each row, separated by commas, semicolons or white space; comments begin with #;
/// the first row may hold names.
pub(super) fn read(path: &Path) -> Result<Vec<Vec2>, SystemError> {
    let source = super::read_text(path)?;
    let mut points: Vec<Vec2> = Vec::new();
    let mut first = true;
    let mut start = 0;
    for line in source.text.split_inclusive('\n') {
        let span = Span::new(start, start + line.trim_end().len());
        start += line.len();
        let content = line.split('#').next().unwrap_or("").trim();
        if content.is_empty() {
            continue;
        }
        match (row(content), first) {
            (Some(point), _) if points.last() == Some(&point) => {
                return Err(SystemError::at(span, Problem::RepeatedPoint).in_source(&source));
            }
            (Some(point), _) => points.push(point),
            (None, true) if is_header(content) => {}
            (None, _) => return Err(SystemError::at(span, Problem::PointRow).in_source(&source)),
        }
        first = false;
    }
    enough(points, &source)
}

fn enough(points: Vec<Vec2>, source: &Source) -> Result<Vec<Vec2>, SystemError> {
    if points.len() < 2 {
        let problem = Problem::FewPoints {
            found: points.len(),
            least: 2,
        };
        return Err(SystemError::whole(source.name.clone(), problem));
    }
    Ok(points)
}

fn fields(content: &str) -> impl Iterator<Item = &str> {
    content
        .split(|c: char| c == ',' || c == ';' || c.is_whitespace())
        .filter(|field| !field.is_empty())
}

fn row(content: &str) -> Option<Vec2> {
    let mut fields = fields(content);
    let x: f64 = fields.next()?.parse().ok()?;
    let y: f64 = fields.next()?.parse().ok()?;
    (fields.next().is_none() && x.is_finite() && y.is_finite()).then(|| Vec2::new(x, y))
}

/// Names of columns: no field is a number.
fn is_header(content: &str) -> bool {
    fields(content).all(|field| field.parse::<f64>().is_err())
}

/// Straight pieces from point to point; closed where they are all there is.
pub(super) fn pieces(mut points: Vec<Vec2>, alone: bool) -> Vec<Shape> {
    if alone && points.first() != points.last() {
        points.extend(points.first().copied());
    }
    points
        .windows(2)
        .map(|pair| {
            Shape::Line(Line {
                start: pair[0],
                end: pair[1],
            })
        })
        .collect()
}
