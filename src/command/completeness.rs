//! What a search of orbits can say about itself: how it knows that it is complete, and what the sum leaves out.

use super::note::Note;
use super::subject::Subject;
use super::text::{counted, significant};
use orbitsum::orbit::Catalogue;

/// Notes about what the sum leaves out that would show at k under a smoothing of standard deviation `width`, largest first.
pub(super) fn omissions(subject: &Subject, catalogue: &Catalogue, k: f64, width: f64) -> Vec<Note> {
    let mut kinds: Vec<LeftOut> = Vec::new();
    for omission in &catalogue.omissions {
        let what = omission.kind.to_string();
        let size = omission.size_at(k, width);
        match kinds.iter_mut().find(|known| known.what == what) {
            Some(known) => {
                known.count += omission.count;
                known.length = known.length.min(omission.length);
                known.size = known.size.max(size);
            }
            None => kinds.push(LeftOut {
                what,
                count: omission.count,
                length: omission.length,
                size,
            }),
        }
    }
    kinds.retain(|kind| kind.size >= LEAST_OMISSION);
    kinds.sort_by(|a, b| b.size.total_cmp(&a.size));
    kinds
        .into_iter()
        .map(|kind| Note::LeftOut {
            what: kind.what,
            count: kind.count,
            length: subject.length(kind.length, 4),
            size: kind.size,
        })
        .collect()
}

/// All omissions of one kind: their number, the shortest length and the largest size.
struct LeftOut {
    what: String,
    count: usize,
    length: f64,
    size: f64,
}

/// Omissions below this many levels are far below what the orbit sum is good for.
const LEAST_OMISSION: f64 = 1e-4;

/// How the search knows that it is complete, in words.
pub(super) fn of_search(catalogue: &Catalogue) -> (String, Vec<Note>) {
    if catalogue.integrable.is_some() {
        return (
            "complete: the tori of this integrable shape are listed from their winding numbers, no search was needed".into(),
            Vec::new(),
        );
    }
    let mut sentences = Vec::new();
    let mut notes = Vec::new();
    for (what, passes) in [
        ("from curved walls", &catalogue.passes),
        ("between straight walls", &catalogue.flat_passes),
    ] {
        let (Some(last), Some(first)) = (passes.last(), passes.first()) else {
            continue;
        };
        let before = passes.len().checked_sub(2).map(|index| &passes[index]);
        let rays: usize = passes.iter().map(|pass| pass.rays).sum();
        match before {
            Some(before) if last.added == 0 => sentences.push(format!(
                "search {what}: a start set of {} points, {} times finer than the one before ({} points, rays {} rad apart), \
                 added nothing ({}, {rays} rays)",
                last.sources,
                significant(before.smallest_gap / last.smallest_gap, 2),
                before.sources,
                significant(before.smallest_gap, 2),
                counted(passes.len(), "pass", "passes"),
            )),
            None if first.added == 0 => {
                sentences.push(format!("search {what}: nothing found with {} points", first.sources));
            }
            _ => {
                sentences.push(format!(
                    "search {what}: not settled after {}: the last one, with {} points and rays {} rad apart, still added {}",
                    counted(passes.len(), "pass", "passes"),
                    last.sources,
                    significant(last.smallest_gap, 2),
                    last.added,
                ));
                notes.push(Note::NotSettled {
                    added: last.added,
                    passes: passes.len(),
                });
            }
        }
    }
    (sentences.join("\n"), notes)
}
