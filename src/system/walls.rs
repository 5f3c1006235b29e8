//! Reads the walls of one closed chain.

use super::curves::{self, Parametric, Polar};
use super::error::{Problem, SystemError};
use super::formula::Span;
use super::reader::{FormulaText, Reader, Table, Value, list, span, text, word};
use super::{points, regularity};
use crate::billiard::{Arc, Condition, Curve, Line, PlaneCurve, Shape, Vec2, Wall, cross};
use std::f64::consts::TAU;
use std::path::Path;
use std::sync::Arc as Shared;

/// Kinds of walls by their keys.
pub(super) const KINDS: [&str; 7] = [
    "line", "arc", "curve", "polar", "circle", "points", "spline",
];
/// Keys of a wall.
pub(super) const KEYS: &[&str] = &[
    "line",
    "arc",
    "curve",
    "polar",
    "circle",
    "points",
    "spline",
    "center",
    "turn",
    "condition",
];
/// Words for conditions.
const CONDITIONS: &[&str] = &["dirichlet", "neumann"];
/// Words for the turn of an arc.
const TURNS: &[&str] = &["left", "right"];

/// Relative difference of the two radii of an arc, and relative distance of points, that is put down to rounding.
pub(super) const ROUNDING: f64 = 1e-9;

/// Reads walls one after the other.
pub(super) struct WallReader<'a> {
    pub(super) reader: Reader<'a>,
    /// Folder that names of point files are relative to.
    pub(super) folder: &'a Path,
    /// Condition of walls that do not say otherwise.
    pub(super) condition: Condition,
    /// Is this the only wall of a closed chain? Points and splines then close by themselves.
    pub(super) alone: bool,
}

/// Reads `condition`, Dirichlet by default.
pub(super) fn condition(table: Table<'_>, default: Condition) -> Result<Condition, SystemError> {
    match table.get("condition") {
        None => Ok(default),
        Some(value) => Ok(match word(value, "condition", CONDITIONS)? {
            0 => Condition::Dirichlet,
            _ => Condition::Neumann,
        }),
    }
}

impl WallReader<'_> {
    /// The walls that one table of the list `wall` describes; `pen` is where the wall before ends.
    pub(super) fn read(
        &self,
        table: Table<'_>,
        pen: Option<Vec2>,
    ) -> Result<Vec<Wall>, SystemError> {
        let found: Vec<&'static str> = KINDS
            .into_iter()
            .filter(|kind| table.get(kind).is_some())
            .collect();
        let &[kind] = found.as_slice() else {
            return Err(SystemError::at(table.span, Problem::WallKind { found }));
        };
        deny_keys_of_other_kinds(table, kind)?;
        let value = table.require(kind, "the kind of wall")?;
        let condition = condition(table, self.condition)?;
        let shapes = match kind {
            "line" => vec![self.line(value, needs_start(pen, table.span)?)?],
            "arc" => vec![self.arc(table, value, needs_start(pen, table.span)?)?],
            "circle" => vec![self.circle(table, value)?],
            "curve" => vec![self.curve(value)?],
            "polar" => vec![self.polar(table, value)?],
            "points" => {
                let path = self.folder.join(text(value, "`points`")?);
                let rows = points::read(&path).map_err(|error| error.named_at(span(value)))?;
                points::pieces(rows, self.alone)
            }
            _ => self.spline(value)?,
        };
        Ok(shapes
            .into_iter()
            .map(|shape| Wall::new(shape, condition))
            .collect())
    }

    fn line(&self, value: Value<'_>, start: Vec2) -> Result<Shape, SystemError> {
        let end = self.reader.point(value, "the end of a line")?;
        Ok(Shape::Line(Line { start, end }))
    }

    fn arc(&self, table: Table<'_>, value: Value<'_>, start: Vec2) -> Result<Shape, SystemError> {
        let end = self.reader.point(value, "the end of an arc")?;
        let center = table
            .called("an arc")
            .require("center", "arc = [x, y], center = [x, y]")?;
        let center = self.reader.point(center, "center")?;
        let turn = table
            .get("turn")
            .map_or(Ok(0), |turn| word(turn, "turn", TURNS))?;
        let (from, to) = (start - center, end - center);
        let radius = from.norm();
        if (to.norm() - radius).abs() > ROUNDING * radius.max(to.norm()) {
            return Err(SystemError::at(
                table.span,
                Problem::ArcRadius {
                    start: radius,
                    end: to.norm(),
                },
            ));
        }
        if radius == 0.0 || (end - start).norm() <= ROUNDING * radius {
            return Err(SystemError::at(
                table.span,
                Problem::Geometry(crate::billiard::GeometryError::NoLength { wall: 0 }),
            ));
        }
        let turned = cross(from, to).atan2(from.dot(&to)).rem_euclid(TAU);
        Ok(Shape::Arc(Arc {
            center,
            radius,
            from: from.y.atan2(from.x),
            sweep: if turn == 0 { turned } else { turned - TAU },
        }))
    }

    fn circle(&self, table: Table<'_>, value: Value<'_>) -> Result<Shape, SystemError> {
        let radius = self.reader.positive(value, "the radius")?;
        let center = self.center(table)?.unwrap_or_else(Vec2::zeros);
        Ok(Shape::Arc(Arc {
            center,
            radius,
            from: 0.0,
            sweep: TAU,
        }))
    }

    fn center(&self, table: Table<'_>) -> Result<Option<Vec2>, SystemError> {
        table
            .get("center")
            .map(|center| self.reader.point(center, "center"))
            .transpose()
    }

    fn curve(&self, value: Value<'_>) -> Result<Shape, SystemError> {
        const EXAMPLE: &str = "curve = { x = \"cos(t)\", y = \"sin(t)\", from = 0, to = \"2*pi\" }";
        let table = Table::of(value, "curve", &["x", "y", "from", "to"])?;
        let x = self
            .reader
            .formula_text(table.require("x", EXAMPLE)?, "x")?;
        let y = self
            .reader
            .formula_text(table.require("y", EXAMPLE)?, "y")?;
        let formulas = [x, y];
        let tape = self.reader.tape(&formulas)?;
        let source = Shared::new(Parametric { tape: tape.clone() });
        let curve = self.between(table, source, EXAMPLE)?;
        regularity::check(&curve, &tape, &formulas, table.span)?;
        Ok(Shape::Curve(curve))
    }

    fn polar(&self, outer: Table<'_>, value: Value<'_>) -> Result<Shape, SystemError> {
        const EXAMPLE: &str = "polar = { r = \"1 + 0.3*cos(2*t)\", from = 0, to = \"2*pi\" }";
        let table = Table::of(value, "polar", &["r", "from", "to", "center"])?;
        let formulas = [self
            .reader
            .formula_text(table.require("r", EXAMPLE)?, "r")?];
        let tape = self.reader.tape(&formulas)?;
        let inside = self.center(table)?;
        let center = match inside {
            Some(center) => center,
            None => self.center(outer)?.unwrap_or_else(Vec2::zeros),
        };
        let source = Shared::new(Polar {
            tape: tape.clone(),
            center,
        });
        let curve = self.between(table, source, EXAMPLE)?;
        regularity::check(&curve, &tape, &formulas, table.span)?;
        regularity::check_radius(&curve, &tape, span_of(&formulas[0]))?;
        Ok(Shape::Curve(curve))
    }

    fn between(
        &self,
        table: Table<'_>,
        source: Shared<dyn PlaneCurve>,
        example: &'static str,
    ) -> Result<Curve, SystemError> {
        Ok(Curve {
            source,
            from: self
                .reader
                .length(table.require("from", example)?, "from")?,
            to: self.reader.length(table.require("to", example)?, "to")?,
        })
    }

    fn spline(&self, value: Value<'_>) -> Result<Vec<Shape>, SystemError> {
        let items = list(value, "spline")?;
        let mut points = Vec::with_capacity(items.len());
        for item in items {
            let point = self.reader.point(item, "a point of a spline")?;
            if points.last() == Some(&point) {
                return Err(SystemError::at(span(item), Problem::RepeatedPoint));
            }
            points.push(point);
        }
        let returns = points.len() > 1 && points.first() == points.last();
        if returns {
            points.pop();
        }
        if points.len() < 3 {
            return Err(SystemError::at(
                span(value),
                Problem::FewPoints {
                    found: points.len(),
                    least: 3,
                },
            ));
        }
        let pieces = curves::spline(&points, returns || self.alone);
        Ok(pieces
            .into_iter()
            .map(|piece| {
                let to = piece.length;
                Shape::Curve(Curve {
                    source: Shared::new(piece),
                    from: 0.0,
                    to,
                })
            })
            .collect())
    }
}

fn span_of(formula: &FormulaText) -> Span {
    formula.locate(Span::new(0, formula.text.len()))
}

fn needs_start(pen: Option<Vec2>, wall: Span) -> Result<Vec2, SystemError> {
    pen.ok_or_else(|| {
        SystemError::at(
            wall,
            Problem::Missing {
                key: "start",
                table: "an outline that begins with a line or an arc",
                example: "start = [x, y]",
            },
        )
    })
}

/// `center` and `turn` belong to some kinds only.
fn deny_keys_of_other_kinds(table: Table<'_>, kind: &str) -> Result<(), SystemError> {
    let known: &'static [&'static str] = match kind {
        "arc" => &["arc", "center", "turn", "condition"],
        "circle" => &["circle", "center", "condition"],
        "polar" => &["polar", "center", "condition"],
        "line" => &["line", "condition"],
        "curve" => &["curve", "condition"],
        "points" => &["points", "condition"],
        _ => &["spline", "condition"],
    };
    table.deny_unknown(known)
}
