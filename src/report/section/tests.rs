//! Names and dimensions of the section: present, apart, on the page.

use super::*;
use crate::report::fixture;
use crate::report::svg::tests::{check_texts, text_boxes};

fn texts(svg: &str) -> Vec<String> {
    text_boxes(svg).into_iter().map(|(_, text)| text).collect()
}

#[test]
fn every_shape_is_named_and_every_dimension_is_there() {
    let svg = section_svg(&fixture::model(), &fixture::outline());
    check_texts(&svg);
    let texts = texts(&svg);
    for wanted in ["post", "wall", "upper plate", "post gap", "gap, 0.3 long", "main", "42 turns"] {
        assert!(texts.iter().any(|t| t == wanted), "{wanted} is missing from {texts:?}");
    }
    for wanted in ["Ø 5.4", "Ø 11.5", "Ø 21.2", "Ø 25.5", "11", "16.1"] {
        assert!(texts.iter().any(|t| t == wanted), "{wanted} is missing from {texts:?}");
    }
}

#[test]
fn no_name_is_crossed_by_the_lines_of_a_diameter() {
    // Without the hole the middle of the plates comes to lie on the line of the post.
    let (model, mut outline) = (fixture::model(), fixture::outline());
    for region in &mut outline.regions {
        for p in region.polygons.iter_mut().flatten().filter(|p| (p.r - 2.7e-3).abs() < 1e-9) {
            p.r = 0.0;
        }
    }
    let lines = extension_lines(&model, &outline, &view(&outline));
    assert!(2 < lines.len());
    for (rect, text) in text_boxes(&section_svg(&model, &outline)) {
        let is_crossed = lines.iter().any(|[a, b]| rect.is_crossed(*a, *b));
        assert!(!is_crossed || text.starts_with('Ø'), "a line crosses {text}");
    }
}

#[test]
fn many_thin_shapes_with_long_names_do_not_overlap() {
    let mut outline = fixture::outline();
    for i in 0..40 {
        let mut region = outline.regions[5].clone();
        region.name = format!("shim number {i} with a name that is longer than the page likes");
        let z = 5.4 - 0.27 * f64::from(i);
        region.polygons = vec![fixture::rectangle([2.7, 5.75], [z - 0.05, z])];
        outline.regions.push(region);
    }
    let svg = section_svg(&fixture::model(), &outline);
    check_texts(&svg);
    assert_eq!(texts(&svg).iter().filter(|t| t.starts_with("shim")).count(), 40);
}

#[test]
fn a_slender_rod_and_a_lone_coil_are_drawn() {
    let mut model = fixture::model();
    model.core = None;
    model.gaps.clear();
    let mut outline = fixture::outline();
    outline.regions.drain(1..6);
    outline.regions[1].polygons = vec![fixture::rectangle([20.0, 30.0], [-5.0, 5.0])];
    let svg = section_svg(&model, &outline);
    check_texts(&svg);
    assert!(texts(&svg).contains(&"Ø 60".to_string()));
    outline.regions[1].polygons = vec![fixture::rectangle([0.2, 1.0], [-50.0, 50.0])];
    check_texts(&section_svg(&model, &outline));
}

#[test]
fn an_empty_outline_gives_a_page_with_a_title() {
    let mut outline = fixture::outline();
    outline.regions.truncate(1);
    let mut model = fixture::model();
    model.core = None;
    check_texts(&section_svg(&model, &outline));
}
