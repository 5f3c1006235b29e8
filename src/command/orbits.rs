//! `orbits`: the periodic orbits up to a length and a number of bounces.

use super::answer::Answer;
use super::arguments::Orbits;
use super::completeness;
use super::error::CommandError;
use super::limits::{self, Plan, Wishes};
use super::note::Note;
use super::options::Options;
use super::progress;
use super::subject::Subject;
use super::table::{Cell, Table};
use super::text::{counted, listed, significant};
use orbitsum::billiard::Vec2;
use orbitsum::orbit::tori::{FamilyKind, TorusFamily};
use orbitsum::orbit::{Catalogue, Limits, Orbit, OrbitKind, OrbitPoint, Strip};
use orbitsum::report::{LARGEST_GRID, OrbitDrawing, OrbitStroke, orbits_picture};
use serde_json::json;

const COLUMNS: [&str; 12] = [
    "id",
    "word",
    "bounces",
    "length",
    "trace",
    "index",
    "partner",
    "symmetry",
    "kind",
    "residual",
    "full_length",
    "full_bounces",
];

/// Rows of the table for people.
const SHOWN_ROWS: usize = 40;
/// Words longer than this are cut in the table for people.
const LONGEST_WORD: usize = 44;

pub(super) fn run(typed: &Orbits, options: &Options) -> Result<Answer, CommandError> {
    let wishes = Wishes::of_limits(&typed.limits)?;
    let subject = Subject::load(&typed.system, options)?;
    subject.check_class_of_orbits()?;
    let plan = limits::plan(&subject, &wishes, None)?;
    let catalogue = find(&subject, plan.limits, options);
    Ok(answer(&subject, &plan, &catalogue))
}

/// The search, with progress.
pub(super) fn find(subject: &Subject, limits: Limits, options: &Options) -> Catalogue {
    progress::during(options, "searching for periodic orbits", || {
        Catalogue::find(&subject.system.domain, &subject.symmetry, limits)
    })
}

fn answer(subject: &Subject, plan: &Plan, catalogue: &Catalogue) -> Answer {
    let entries = entries(subject, catalogue);
    let mut table = Table::new(&COLUMNS);
    for (index, entry) in entries.iter().enumerate() {
        table.push(entry.row(index + 1));
    }
    let (completeness, mut notes) = completeness::of_search(catalogue);
    notes.extend(completeness::omissions(
        subject,
        catalogue,
        plan.middle,
        plan.width,
    ));
    if table.rows.len() > SHOWN_ROWS {
        notes.push(Note::MoreRows {
            which: "shortest",
            shown: SHOWN_ROWS,
            all: table.rows.len(),
        });
    }
    let mut metadata = subject.metadata("orbits");
    metadata.insert("max_length".into(), plan.limits.max_length.into());
    metadata.insert("max_bounces".into(), plan.limits.max_bounces.into());
    metadata.insert("completeness".into(), completeness.as_str().into());
    metadata.insert("passes".into(), passes_json(catalogue));
    metadata.insert("left_out".into(), omissions_json(catalogue, plan));
    Answer {
        name: "orbits",
        summary: summary(subject, plan, &entries, &completeness),
        shown: shown(&table),
        table,
        metadata,
        notes,
        pictures: vec![("orbits.svg".into(), picture(subject, &entries))],
        more_tables: Vec::new(),
        obsolete: None,
        failure: None,
    }
}

fn passes_json(catalogue: &Catalogue) -> serde_json::Value {
    let list = |passes: &[orbitsum::orbit::Pass]| -> serde_json::Value {
        passes
            .iter()
            .map(|pass| {
                json!({
                    "sources": pass.sources,
                    "smallest_gap": pass.smallest_gap,
                    "rays": pass.rays,
                    "added": pass.added,
                })
            })
            .collect()
    };
    json!({ "curved": list(&catalogue.passes), "straight": list(&catalogue.flat_passes) })
}

/// Omissions with their size at the middle of the default window, unsmoothed and with the default smoothing.
fn omissions_json(catalogue: &Catalogue, plan: &Plan) -> serde_json::Value {
    catalogue
        .omissions
        .iter()
        .map(|omission| {
            json!({
                "what": omission.kind.to_string(),
                "count": omission.count,
                "length": omission.length,
                "k": plan.middle,
                "size": omission.size_at(plan.middle, 0.0),
                "size_smoothed": omission.size_at(plan.middle, plan.width),
            })
        })
        .collect()
}

fn summary(subject: &Subject, plan: &Plan, entries: &[Entry], completeness: &str) -> String {
    let kinds = ["isolated", "axis", "joint", "family", "diffractive"];
    let counts: Vec<String> = kinds
        .iter()
        .map(|&kind| {
            (
                kind,
                entries.iter().filter(|entry| entry.kind == kind).count(),
            )
        })
        .filter(|(_, count)| *count > 0)
        .map(|(kind, count)| format!("{count} {kind}"))
        .collect();
    let limits: Vec<(String, String)> = plan
        .choices
        .iter()
        .filter(|(name, _)| name == "longest orbit" || name == "most bounces")
        .cloned()
        .collect();
    let found = if counts.is_empty() {
        String::new()
    } else {
        format!(": {}", counts.join(", "))
    };
    format!(
        "{}{}{}{}\n{completeness}\n",
        subject.heading(),
        listed(&limits),
        counted(
            entries.len(),
            "primitive orbit or family",
            "primitive orbits and families"
        ),
        found,
    )
}

/// The first rows, long words cut.
fn shown(table: &Table) -> Table {
    let mut shown = table.clone();
    shown.rows.truncate(SHOWN_ROWS);
    for row in &mut shown.rows {
        if let Cell::Text(word) = &mut row[1]
            && word.chars().count() > LONGEST_WORD
        {
            *word = word
                .chars()
                .take(LONGEST_WORD)
                .chain("...".chars())
                .collect();
        }
        if let Cell::Number(residual) = row[9] {
            row[9] = Cell::Text(significant(residual, 1));
        }
    }
    shown
}

/// One row: an orbit, a strip or a torus.
struct Entry {
    word: String,
    bounces: usize,
    length: f64,
    trace: Option<f64>,
    index: Option<usize>,
    partner: usize,
    symmetry: String,
    kind: &'static str,
    residual: Option<f64>,
    copies: usize,
    path: Vec<Vec2>,
}

impl Entry {
    fn row(&self, id: usize) -> Vec<Cell> {
        vec![
            id.into(),
            self.word.as_str().into(),
            self.bounces.into(),
            self.length.into(),
            self.trace.into(),
            self.index.into(),
            self.partner.into(),
            self.symmetry.as_str().into(),
            self.kind.into(),
            self.residual.into(),
            (self.length * self.copies as f64).into(),
            (self.bounces * self.copies).into(),
        ]
    }

    fn of_orbit(subject: &Subject, orbit: &Orbit) -> Self {
        Self {
            word: orbit.word.clone(),
            bounces: orbit.bounces(),
            length: orbit.length,
            trace: Some(orbit.trace()),
            index: orbit.index(),
            partner: usize::from(orbit.partner),
            symmetry: subject.symmetry.elements[orbit.symmetry].name.clone(),
            kind: orbit.kind.word(),
            residual: Some(orbit.residual),
            copies: orbit.copies,
            path: full_path(subject, &orbit.points, orbit.symmetry, orbit.copies),
        }
    }

    fn of_strip(subject: &Subject, strip: &Strip) -> Self {
        Self {
            word: strip.word.clone(),
            bounces: strip.bounces(),
            length: strip.length,
            trace: None,
            index: None,
            partner: usize::from(strip.partner),
            symmetry: subject.symmetry.elements[strip.symmetry].name.clone(),
            kind: "family",
            residual: None,
            copies: strip.copies,
            path: full_path(subject, &strip.points, strip.symmetry, strip.copies),
        }
    }

    fn of_torus(family: &TorusFamily) -> Self {
        let kind = match family.kind {
            FamilyKind::CenterDiffraction => "diffractive",
            FamilyKind::RadialEdge | FamilyKind::ShortAxis | FamilyKind::LongAxis => "axis",
            _ => "family",
        };
        Self {
            word: torus_word(family.kind, family.winding),
            bounces: family.bounces as usize,
            length: family.length,
            trace: None,
            index: None,
            partner: family.directions as usize,
            symmetry: "e".into(),
            kind,
            residual: None,
            copies: 1,
            path: Vec::new(),
        }
    }
}

/// A family in words, such as `torus of chords, 2 turns`.
pub(super) fn torus_word(kind: FamilyKind, winding: u32) -> String {
    match winding {
        0 => kind.to_string(),
        turns => format!("{kind}, {}", counted(turns as usize, "turn", "turns")),
    }
}

/// Bounce points of the full orbit: the reduced one, moved by its group element as often as it takes to close.
fn full_path(subject: &Subject, points: &[OrbitPoint], element: usize, copies: usize) -> Vec<Vec2> {
    let symmetry = &subject.symmetry;
    let mut power = 0;
    let mut path = Vec::with_capacity(points.len() * copies);
    for _ in 0..copies {
        path.extend(
            points
                .iter()
                .map(|point| symmetry.apply(power, point.point)),
        );
        power = symmetry.product[element][power];
    }
    path
}

/// All orbits and families, shortest first.
fn entries(subject: &Subject, catalogue: &Catalogue) -> Vec<Entry> {
    let orbits = catalogue
        .orbits
        .iter()
        .map(|orbit| Entry::of_orbit(subject, orbit));
    let strips = catalogue
        .strips
        .iter()
        .map(|strip| Entry::of_strip(subject, strip));
    let tori = catalogue
        .tori
        .families
        .iter()
        .filter(|family| family.repetition == 1)
        .map(Entry::of_torus);
    let mut entries: Vec<Entry> = orbits.chain(strips).chain(tori).collect();
    // Stable: equal lengths stay in the order of the search.
    entries.sort_by(|a, b| a.length.total_cmp(&b.length));
    entries
}

fn picture(subject: &Subject, entries: &[Entry]) -> String {
    let drawings: Vec<OrbitDrawing<'_>> = entries
        .iter()
        .enumerate()
        .filter(|(_, entry)| !entry.path.is_empty())
        .map(|(index, entry)| OrbitDrawing {
            label: format!(
                "#{}  L = {}\n{}",
                index + 1,
                subject.length(entry.length, 6),
                counted(entry.bounces, "bounce", "bounces")
            ),
            path: &entry.path,
            stroke: match entry.kind {
                "axis" => OrbitStroke::Axis,
                "family" => OrbitStroke::Family,
                word if word == OrbitKind::Joint.word() => OrbitStroke::Joint,
                _ => OrbitStroke::Isolated,
            },
        })
        .collect();
    let shown = drawings.len().min(LARGEST_GRID);
    let title = format!(
        "{}: {}",
        subject.title(),
        match shown {
            0 => "no orbit to draw".to_owned(),
            _ if shown == drawings.len() => "all orbits".to_owned(),
            _ => "the shortest orbits".to_owned(),
        }
    );
    orbits_picture(&subject.system.domain, &drawings, &title)
}
