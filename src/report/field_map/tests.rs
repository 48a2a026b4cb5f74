//! The field map: bands cover the picture, texts stay apart, the same field gives the same bytes.

use super::*;
use crate::report::fixture;
use crate::report::svg::tests::{check_texts, text_boxes};

fn draw(mirror: bool, hot_spots: &[HotSpot]) -> String {
    draw_field(&fixture::field(24), mirror, hot_spots)
}

fn draw_field(field: &fixture::Field, mirror: bool, hot_spots: &[HotSpot]) -> String {
    let outline = fixture::outline();
    let map = FieldMap {
        title: "Buoy charger choke",
        mesh: &field.mesh,
        outline: &outline,
        solution: &field.solution,
        b_corner: &field.cells.b_corner,
        hot_spots,
        mirror,
    };
    field_svg(&map)
}

#[test]
fn texts_stay_apart_with_hot_spots_at_the_rim_and_on_one_another() {
    let spot = |r, z| HotSpot { part: "post".to_string(), r, z, flux_density: 0.4 };
    let mut spots = fixture::results().hot_spots;
    spots.extend([
        spot(0.0, 0.0),
        spot(0.0, 0.0),
        spot(1e-5, 1e-5),
        spot(13.5e-3, 9e-3),
        spot(0.0, -9e-3),
    ]);
    check_texts(&draw(false, &spots));
    check_texts(&draw(true, &spots));
    assert!(text_boxes(&draw(false, &spots)).iter().any(|(_, t)| t == "512 mT"));
}

#[test]
fn the_legend_names_the_unit_and_the_step_of_the_flux_lines() {
    let texts: Vec<String> = text_boxes(&draw(false, &[])).into_iter().map(|(_, t)| t).collect();
    assert!(texts.iter().any(|t| t == "|B| in mT"), "{texts:?}");
    // The fixture's largest ψ is 0.4·r²/2·exp(−(r/9)⁴) at r = 9/2^¼ mm: 4.27e-6 Wb/rad·… → 2πψ/22 rounds up to 2.4 µWb.
    assert!(texts.iter().any(|t| t.ends_with("µWb of flux")), "{texts:?}");
}

#[test]
fn plain_numbers_are_never_below_the_value() {
    for value in [1.0, 1.01, 0.19, 0.31, 8.1, 9.99, 3e-6] {
        let plain = plain_above(value);
        assert!(value <= plain * (1.0 + 1e-9) && plain <= 1.34 * value, "{value} → {plain}");
    }
}

#[test]
fn equal_fields_give_equal_bytes_and_a_zero_field_is_drawn_too() {
    assert_eq!(draw(true, &[]), draw(true, &[]));
    let mut field = fixture::field(6);
    field.solution.vertex.fill(0.0);
    field.solution.edge.fill(0.0);
    field.cells.b_corner.fill([0.0; 3]);
    check_texts(&draw_field(&field, false, &[]));
}

#[test]
fn a_look_at_the_pictures_is_written_on_request() {
    // GAPWRIGHT_LOOK=DIR writes the drawings of the fixtures there, for eyes.
    let Ok(dir) = std::env::var("GAPWRIGHT_LOOK") else { return };
    let dir = std::path::Path::new(&dir);
    std::fs::write(dir.join("field.svg"), draw(false, &fixture::results().hot_spots)).unwrap();
    std::fs::write(dir.join("full.svg"), draw(true, &fixture::results().hot_spots)).unwrap();
    let section = super::super::section::section_svg(&fixture::model(), &fixture::outline());
    std::fs::write(dir.join("section.svg"), section).unwrap();
}
