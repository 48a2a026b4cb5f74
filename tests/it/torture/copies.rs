//! Copies of a section: turned over, and at other sizes.

use super::draft::{Copy, Draft, Law};
use super::judge::{overlap, solved};

fn drafts() -> Vec<Draft> {
    let pot = Draft::pot(2000.0, &[("hole_diameter", 5.4), ("corner_radius", 0.5)])
        .gap("post", 0.3, 1.1)
        .coil([6.6, 10.2], [-4.9, 4.9])
        .coil([6.0, 6.5], [-2.0, 3.3]);
    let mut saturating = pot.clone();
    saturating.laws = vec![Law::Saturation(2000.0, 0.4)];
    saturating.coils[0].current = 10.0;
    let parts = Draft::new(300.0)
        .part(&[[0.0, 0.0], [3.0, 1.0], [2.0, 5.0]])
        .rounded(&[[3.0, 1.0, 0.0], [6.0, 1.3, 0.4], [4.0, 4.0, 0.0]])
        .coil([7.0, 9.0], [0.0, 1.0]);
    let joint = Draft::pot(2000.0, &[("joint", 0.003)])
        .gap("spacer", 0.1, 0.0)
        .coil([6.6, 10.2], [-4.9, 0.3]);
    vec![pot, saturating, parts, joint, Draft::new(1.0).coil([20.0, 30.0], [-5.0, 5.1])]
}

#[test]
fn mirrored_copies_overlap() {
    for draft in drafts() {
        let copy = |mirrored| draft.copy(Copy { factor: 1.0, mirrored, interval: 0.002 });
        let (here, there) = (solved(&copy(false)), solved(&copy(true)));
        assert!(overlap(here.divided(1.0), there.divided(1.0)), "{here:?} {there:?}");
    }
}

#[test]
fn copies_at_other_sizes_overlap() {
    for draft in drafts() {
        let copy = |factor| draft.copy(Copy { factor, mirrored: false, interval: 0.002 });
        let here = solved(&copy(1.0));
        for factor in [1.0 / 3.0, 0.01, 7.7, 1000.0] {
            let there = solved(&copy(factor));
            let cube = factor * factor * factor;
            assert!(overlap(here.divided(1.0), there.divided(cube)), "{here:?} {there:?}");
        }
    }
}

#[test]
fn copies_at_powers_of_two_agree_to_the_last_bit() {
    for mut draft in drafts() {
        // A power of two of a millimetre figure is a power of two in metres only if the figure is in metres.
        draft.unit = "m";
        let copy = |factor| draft.copy(Copy { factor, mirrored: false, interval: 0.005 });
        let here = solved(&copy(1.0));
        for power in [-12, -3, -2, 1, 4] {
            let factor = 2.0_f64.powi(power);
            let there = solved(&copy(factor));
            let (ends, scaled) = (here.divided(1.0), there.divided(factor * factor * factor));
            assert_eq!(here.n_unknowns, there.n_unknowns);
            assert_eq!(ends, scaled, "2^{power}\n{}", draft.text());
        }
    }
}
