//! `show`: is this the shape that was meant?

use super::answer::Answer;
use super::arguments::Show;
use super::error::CommandError;
use super::note::Note;
use super::options::Options;
use super::progress;
use super::subject::{Subject, class_name};
use super::table::{Cell, Table};
use super::text::{listed, significant};
use orbitsum::billiard::{
    self, Condition, KNOWN_TO, Role, Tracer, VertexKind, is_rotationally_invariant,
};
use orbitsum::report::shape_picture;

/// Corners and joints that are listed for people.
const SHOWN_CORNERS: usize = 24;

/// Bounces that are followed for averages: errors of about a thousandth in a tenth of a second.
const BOUNCES: usize = 1_000_000;
/// Digits of measured numbers for people.
const MEASURED_DIGITS: usize = 5;

pub(super) fn run(typed: &Show, options: &Options) -> Result<Answer, CommandError> {
    let subject = Subject::load(&typed.system, options)?;
    let facts = facts(&subject, options);
    let mut table = Table::new(&["quantity", "value", "error", "unit", "remark"]);
    for fact in &facts {
        table.push(fact.row());
    }
    let units = &subject.system.units;
    let picture = shape_picture(
        &subject.system.domain,
        &subject.symmetry,
        &subject.title(),
        Some(units.length_label()).filter(|label| !label.is_empty()),
    );
    let mut metadata = subject.metadata("show");
    metadata.insert("about".into(), subject.system.about.as_str().into());
    let classes: serde_json::Value = subject
        .symmetry
        .irreps
        .iter()
        .map(|irrep| serde_json::json!({ "name": irrep.name, "aliases": irrep.aliases, "dimension": irrep.dimension }))
        .collect();
    metadata.insert("classes".into(), classes);
    Ok(Answer {
        name: "show",
        summary: summary(&subject, &facts),
        shown: Table::default(),
        table,
        metadata,
        notes: notes(&subject),
        pictures: vec![("shape.svg".into(), picture)],
        more_tables: Vec::new(),
        obsolete: None,
        failure: None,
    })
}

/// One thing to know about the shape.
struct Fact {
    quantity: String,
    value: Cell,
    error: Option<f64>,
    unit: String,
    remark: String,
}

impl Fact {
    fn new(quantity: impl Into<String>, value: impl Into<Cell>) -> Self {
        Self {
            quantity: quantity.into(),
            value: value.into(),
            error: None,
            unit: String::new(),
            remark: String::new(),
        }
    }

    fn error(mut self, error: f64) -> Self {
        self.error = Some(error);
        self
    }

    fn unit(mut self, unit: impl Into<String>) -> Self {
        self.unit = unit.into();
        self
    }

    fn remark(mut self, remark: impl Into<String>) -> Self {
        self.remark = remark.into();
        self
    }

    fn row(&self) -> Vec<Cell> {
        let words = |text: &str| {
            if text.is_empty() {
                Cell::Empty
            } else {
                text.into()
            }
        };
        vec![
            self.quantity.as_str().into(),
            self.value.clone(),
            self.error.into(),
            words(&self.unit),
            words(&self.remark),
        ]
    }

    fn line(&self) -> (String, String) {
        let mut text = match &self.value {
            // A measured number has no more digits than its error leaves it.
            Cell::Number(value) if self.error.is_some() => significant(*value, MEASURED_DIGITS),
            Cell::Number(value) => significant(*value, 10),
            Cell::Count(count) => count.to_string(),
            Cell::Text(text) => text.clone(),
            Cell::Empty => String::new(),
        };
        if let Some(error) = self.error {
            text += &format!(" +- {}", significant(error, 2));
        }
        for part in [&self.unit, &self.remark] {
            if !part.is_empty() {
                text += if text.is_empty() { "" } else { " " };
                text += part;
            }
        }
        (self.quantity.clone(), text)
    }
}

fn facts(subject: &Subject, options: &Options) -> Vec<Fact> {
    let mut facts = measures(subject);
    facts.extend(corners(subject));
    facts.extend(symmetry(subject));
    facts.extend(dynamics(subject, options));
    facts
}

fn measures(subject: &Subject) -> Vec<Fact> {
    let domain = &subject.system.domain;
    let length = subject.system.units.length_label();
    let squared = if length.is_empty() {
        String::new()
    } else {
        format!("{length}^2")
    };
    let holes = domain.loops.iter().filter(|chain| chain.role == Role::Hole);
    let slits = domain.loops.iter().filter(|chain| chain.role == Role::Slit);
    let curved = domain.walls.iter().filter(|wall| !wall.is_straight());
    vec![
        Fact::new("area", domain.area).unit(squared),
        Fact::new("perimeter", domain.perimeter).unit(length),
        Fact::new(
            "perimeter_dirichlet",
            domain.length_under(Condition::Dirichlet),
        )
        .unit(length),
        Fact::new("perimeter_neumann", domain.length_under(Condition::Neumann)).unit(length),
        Fact::new("walls", domain.walls.len()).remark(format!(
            "({} curved; {} and {}, each face of a slit counted)",
            curved.count(),
            super::text::counted(holes.count(), "hole", "holes"),
            super::text::counted(slits.count(), "slit", "slits"),
        )),
        Fact::new("curvature", turning(subject))
            .remark("(integral over the walls; 2 pi = 6.283185 for a smooth outline)"),
    ]
}

/// Integral of the curvature over all walls, from the constant term that it gives in the smooth count.
fn turning(subject: &Subject) -> f64 {
    let whole = orbitsum::baseline::weyl(&subject.system.domain, &subject.symmetry, None);
    whole
        .terms
        .iter()
        .filter(|term| term.contribution == orbitsum::baseline::Contribution::Curvature)
        .map(|term| 12.0 * std::f64::consts::PI * term.coefficient)
        .sum()
}

fn corners(subject: &Subject) -> Vec<Fact> {
    let domain = &subject.system.domain;
    let (mut corners, mut joints) = (0, 0);
    domain
        .vertices
        .iter()
        .filter_map(|vertex| {
            let kind = match vertex.kind {
                VertexKind::Smooth => return None,
                VertexKind::Joint => "smooth, with a jump of curvature".to_owned(),
                VertexKind::Regular { n } => format!("pi/{n}: rays go on after {n} reflections"),
                VertexKind::Corner => "diffracts".to_owned(),
            };
            let name = if vertex.kind == VertexKind::Joint {
                joints += 1;
                format!("joint_{joints}")
            } else {
                corners += 1;
                format!("corner_{corners}")
            };
            let place = format!(
                "at ({}, {}), {kind}",
                significant(vertex.point.x, 6),
                significant(vertex.point.y, 6)
            );
            Some(
                Fact::new(name, vertex.angle.to_degrees())
                    .unit("degrees")
                    .remark(place),
            )
        })
        .collect()
}

fn symmetry(subject: &Subject) -> Vec<Fact> {
    let symmetry = &subject.symmetry;
    if is_rotationally_invariant(&subject.system.domain) {
        return vec![
            Fact::new("symmetry", "all rotations")
                .remark("(treated as integrable, without classes)"),
        ];
    }
    let mut facts = vec![Fact::new("symmetry", symmetry.name.as_str())];
    if symmetry.order() > 1 {
        facts.extend(symmetry.irreps.iter().enumerate().map(|(index, irrep)| {
            let dimension = match irrep.dimension {
                1 => String::new(),
                dimension => format!("levels {dimension}-fold"),
            };
            Fact::new(format!("class_{}", index + 1), class_name(irrep)).remark(dimension)
        }));
    }
    facts
}

/// Integrable or not, mean chord, Lyapunov exponent and prediction horizon.
fn dynamics(subject: &Subject, options: &Options) -> Vec<Fact> {
    let domain = &subject.system.domain;
    let length = subject.system.units.length_label();
    let integrable = super::fluctuation::is_integrable(subject);
    let how = match (integrable, subject.integrable.is_some()) {
        (true, true) => "(summed by tori)",
        (true, false) => "(summed by strips of parallel orbits)",
        _ => "",
    };
    let measured = progress::during(options, "following rays", || {
        billiard::dynamics(domain, &Tracer::new(domain), BOUNCES)
    });
    let chord = std::f64::consts::PI * domain.area / domain.perimeter;
    let mut facts = vec![
        Fact::new("integrable", if integrable { "yes" } else { "no" }).remark(how),
        Fact::new("mean_chord", chord)
            .unit(length)
            .remark("(pi area/perimeter)"),
        Fact::new("mean_chord_measured", measured.mean_chord)
            .error(measured.mean_chord_error)
            .unit(length)
            .remark(format!("(over {BOUNCES} bounces)")),
    ];
    let Some(horizon) = measured.horizon_bounces else {
        facts.push(Fact::new("lyapunov_per_bounce", 0.0).error(measured.lyapunov_error).remark(
            "compatible with zero: near rays separate as a power of time, and no prediction horizon exists",
        ));
        return facts;
    };
    let per_length = match length {
        "" => String::new(),
        unit => format!("1/{unit}"),
    };
    facts.extend([
        Fact::new("lyapunov_per_bounce", measured.lyapunov_per_bounce)
            .error(measured.lyapunov_error)
            .remark("(mean over all of phase space)"),
        Fact::new("lyapunov_per_length", measured.lyapunov_per_length)
            .error(measured.lyapunov_error / measured.mean_chord)
            .unit(per_length),
        Fact::new("prediction_horizon", horizon.round())
            .unit("bounces")
            .remark(format!(
                "(a start known to {} of the size is lost after that)",
                significant(KNOWN_TO, 3)
            )),
    ]);
    if measured.escaped > 0 {
        facts.push(
            Fact::new("escaped", measured.escaped)
                .remark("trajectories left through a wall: please report this shape"),
        );
    }
    facts
}

fn notes(subject: &Subject) -> Vec<Note> {
    let domain = &subject.system.domain;
    let count = |wanted: fn(&VertexKind) -> bool| {
        domain
            .vertices
            .iter()
            .filter(|vertex| wanted(&vertex.kind))
            .count()
    };
    let mut notes = Vec::new();
    let diffracting = count(|kind| *kind == VertexKind::Corner);
    if diffracting > 0 && subject.integrable.is_none() {
        notes.push(Note::Diffracts {
            corners: diffracting,
        });
    }
    if let Some(limit) = subject.system.units.flat_limit() {
        notes.push(Note::FlatUpTo {
            limit: subject.level(limit, 8),
        });
    }
    notes
}

fn summary(subject: &Subject, facts: &[Fact]) -> String {
    let system = &subject.system;
    let mut heading = format!("{}\n", subject.title());
    if !system.about.is_empty() {
        heading += &format!("{}\n", system.about);
    }
    let mut pairs: Vec<(String, String)> = system
        .parameters
        .iter()
        .map(|(name, value)| (format!("parameter {name}"), significant(*value, 10)))
        .collect();
    let is_vertex =
        |fact: &Fact| fact.quantity.starts_with("corner_") || fact.quantity.starts_with("joint_");
    let hidden = facts
        .iter()
        .filter(|fact| is_vertex(fact))
        .count()
        .saturating_sub(SHOWN_CORNERS);
    let mut seen = 0;
    for fact in facts {
        let (name, text) = fact.line();
        if is_vertex(fact) {
            seen += 1;
            if seen > SHOWN_CORNERS {
                continue;
            }
        }
        pairs.push((name.replace('_', " "), text));
        if is_vertex(fact) && seen == SHOWN_CORNERS && hidden > 0 {
            pairs.push((
                String::new(),
                format!("and {hidden} more, see --format csv"),
            ));
        }
    }
    format!("{heading}\n{}", listed(&pairs))
}
