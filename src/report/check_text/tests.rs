//! The screen of `check`: the sheet read back, no columns lost.

use super::*;
use crate::report::fixture;
use expect_test::expect;

fn understood() -> Understood {
    Understood {
        effective: Some(Effective {
            area_min: 80e-6,
            area: 92e-6,
            length: 37e-3,
            volume: 3.4e-6,
            c1: 400.0,
            c2: 4.4e6,
        }),
        ungapped_inductance_factor: Some(6.2e-6),
        gaps: vec![("post gap".to_string(), 2.947e6)],
        hand_inductance_factor: Some(380e-9),
        gap_correction: Some(GapCorrection::Log),
        notes: vec![],
    }
}

#[test]
fn the_sheet_is_read_back() {
    expect![[r#"
        Buoy charger choke
          No mistakes found. Lengths in mm, r from the axis, z from the core's middle.

        Materials
          soft_ferrite            relative permeability 2000, constant

        Core
          post                    Ø 11.5, hole Ø 5.4
          wall                    Ø 21.2 to Ø 25.5
          end plates              Ø 25.5, 2.55 thick
          window                  height 11
          whole                   height 16.1

        Gaps
          post gap                0.3 ground out of the post
          l/(µ0 A) of post gap    2.947 /µH

        Windings
          main                    42 turns at 1.80 A
                                  r 6.6 to 10.2, z −4.9 to 4.9

        By hand
          A_e                     92.00 mm²
          l_e                     37.00 mm
          V_e                     3400.0 mm³
          C1                      0.4000 /mm
          C2                      4.4000e-3 /mm³
          A_L without any gap     6.200 µH
          A_L of the hand sum     380.0 nH, gap correction: log

        Asked for
          interval                0.1 % of the inductance at most
    "#]]
    .assert_eq(&check_screen(&fixture::model(), &understood()));
}

#[test]
fn a_coil_without_a_core_has_no_hand_sum() {
    let mut model = fixture::model();
    model.core = None;
    model.gaps.clear();
    model.materials.clear();
    let text = check_screen(&model, &Understood::default());
    assert!(
        !text.contains("By hand") && !text.contains("Core") && text.contains("42 turns"),
        "{text}"
    );
}

#[test]
fn long_names_leave_the_columns_in_place() {
    let mut model = fixture::model();
    model.windings[0].name =
        "a winding with a very long name indeed, longer than a column".to_string();
    for line in check_screen(&model, &understood()).lines() {
        assert!(line.chars().count() <= 80, "{line}");
    }
}
