//! Results → text or bytes: terminal, JSON, CSV, VTK, SVG. Computes no physics, reads no file, clock or environment.
//!
//! Every function takes values and returns a `String` or bytes; `cli` writes them. Sampling a given field for a
//! drawing (contours, colour bands) is drawing and lives here; the field itself is handed in.

pub mod check_text;
mod colour;
mod contour;
pub mod csv;
mod dots;
pub mod field_map;
#[cfg(test)]
pub(crate) mod fixture;
pub mod json;
mod labels;
mod numbers;
pub mod saturate;
pub mod section;
mod svg;
pub mod terminal;
pub mod vtk;

use crate::results::Results;

/// What the caller's clock measured: (stage, seconds) in the order of the run. Empty when nobody asked.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct StageTimes {
    pub stages: Vec<(String, f64)>,
}

/// The sentence that stands first when the rounds stopped short of the wanted interval, `None` when they got there.
pub fn shortfall(results: &Results) -> Option<String> {
    if results.reached {
        return None;
    }
    let (width, kind) = match (results.is_linear, &results.inductance) {
        (true, Some(inductance)) => (numbers::relative_width(inductance), "inductance"),
        _ => (numbers::relative_width(&results.coenergy), "coenergy"),
    };
    let remedy = match results.unresolved {
        Some(_) => "more unknowns would not help, see the note on the point that no mesh resolves",
        None => MORE_UNKNOWNS,
    };
    Some(too_wide(kind, width, results.wanted, remedy))
}

/// What helps where the number of unknowns stopped the rounds.
const MORE_UNKNOWNS: &str = "raise max_unknowns or ask for a wider interval";

/// That the interval of something is wider than wanted, and what can be done.
fn too_wide(of: &str, width: f64, wanted: f64, remedy: &str) -> String {
    format!(
        "the interval of the {of} is {} wide, {} was wanted: the guarantee holds, but for the wider interval; {remedy}",
        numbers::percent(width, 2),
        numbers::percent(wanted, 2)
    )
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::model::Point;

    #[test]
    fn a_shortfall_names_the_remedy_that_helps() {
        let mut results = fixture::results();
        assert_eq!(shortfall(&results), None);
        results.reached = false;
        assert!(
            shortfall(&results)
                .unwrap()
                .ends_with("raise max_unknowns or ask for a wider interval")
        );
        results.unresolved = Some(Point { r: 1e-3, z: 0.0 });
        let sentence = shortfall(&results).unwrap();
        assert!(!sentence.contains("max_unknowns"), "{sentence}");
        assert!(
            sentence.ends_with("see the note on the point that no mesh resolves"),
            "{sentence}"
        );
    }
}
