//! Models of the reference sections and of the random cases.

use crate::coils::Coil;
use crate::modes::GappedPot;
use crate::sphere::SphereCoil;
use gapwright::model::{
    Accuracy, Across, Core, Corner, Form, Gap, HotSpotWish, Law, Material, MaterialId, Model, Part,
    Point, PotWall, Section, Winding,
};
use std::f64::consts::PI;

const MM: f64 = 1e-3;

/// Nothing but one material of constant permeability.
pub fn bare(permeability: f64) -> Model {
    Model {
        title: String::new(),
        materials: vec![Material { name: "core".to_owned(), law: Law::Constant { permeability } }],
        core: None,
        gaps: Vec::new(),
        windings: Vec::new(),
        parts: Vec::new(),
        probes: Vec::new(),
        accuracy: Accuracy::default(),
        estimate: None,
        requirements: Vec::new(),
        hot_spots: HotSpotWish::default(),
    }
}

/// A winding of one section.
pub fn winding(coil: &Coil, turns: f64, current: f64) -> Winding {
    let section = Section { turns, radii: coil.radii, heights: coil.heights };
    Winding { name: "winding".to_owned(), sections: vec![section], current, ripple: 0.0 }
}

/// Coils in air, each with its turns and its current.
pub fn air_coils(coils: &[(Coil, f64, f64)]) -> Model {
    let windings =
        coils.iter().map(|(coil, turns, current)| winding(coil, *turns, *current)).collect();
    Model { windings, ..bare(1.0) }
}

/// One coil in air, one turn, 1 A: L = 2W' and L/µ0 is the geometric figure.
pub fn air_coil(coil: &Coil) -> Model {
    air_coils(&[(*coil, 1.0, 1.0)])
}

/// A gap across the post in the middle.
fn post_gap(length: f64) -> Vec<Gap> {
    vec![Gap { name: "post gap".to_owned(), across: Across::Post, length, center: 0.0 }]
}

/// A core of sharp corners without a joint.
fn core(form: Form) -> Option<Core> {
    Some(Core { material: MaterialId(0), form, corner_radius: 0.0, joint: 0.0 })
}

/// A coil from millimetres.
fn coil_mm(radii: [f64; 2], half_height: f64) -> Coil {
    Coil { radii: radii.map(|r| r * MM), heights: [-half_height * MM, half_height * MM] }
}

/// R1 of `field_cases.json`: gapped pot core with a hole, 42 turns.
pub fn r1(current: f64) -> Model {
    let form = Form::Pot {
        wall: PotWall::OuterDiameter(25.5 * MM),
        wall_inner_diameter: 21.2 * MM,
        post_diameter: 11.5 * MM,
        hole_diameter: 5.4 * MM,
        height: 16.1 * MM,
        window_height: 11.0 * MM,
    };
    let windings = vec![winding(&coil_mm([6.6, 10.2], 4.9), 42.0, current)];
    Model { core: core(form), gaps: post_gap(0.3 * MM), windings, ..bare(2000.0) }
}

/// The core of R5, R9 and R10 with a post gap [m].
fn solid_pot(permeability: f64, gap: f64, windings: Vec<Winding>) -> Model {
    let form = Form::Pot {
        wall: PotWall::OuterDiameter(32.0 * MM),
        wall_inner_diameter: 28.0 * MM,
        post_diameter: 14.0 * MM,
        hole_diameter: 0.0,
        height: 23.0 * MM,
        window_height: 16.0 * MM,
    };
    Model { core: core(form), gaps: post_gap(gap), windings, ..bare(permeability) }
}

/// R5: solid post, gap 1 mm, 60 turns; the permeability is 1500 in the reference.
pub fn r5(permeability: f64, turns: f64, current: f64) -> Model {
    solid_pot(permeability, 1.0 * MM, vec![winding(&coil_mm([8.2, 13.4], 7.2), turns, current)])
}

/// R7: air coil of 100 turns.
pub fn r7(turns: f64, current: f64) -> Model {
    air_coils(&[(coil_mm([20.0, 30.0], 5.0), turns, current)])
}

/// R8: rod with a short winding of 80 turns, 1 A.
pub fn r8() -> Model {
    let form = Form::Rod { diameter: 10.0 * MM, hole_diameter: 0.0, height: 100.0 * MM };
    Model {
        core: core(form),
        windings: vec![winding(&coil_mm([5.5, 7.0], 10.0), 80.0, 1.0)],
        ..bare(500.0)
    }
}

/// R9: the core of R5 with a gap of 0.1 mm and two windings of 30 and 15 turns.
pub fn r9(currents: [f64; 2]) -> Model {
    let primary = winding(&coil_mm([8.2, 10.4], 7.2), 30.0, currents[0]);
    let secondary = winding(&coil_mm([11.0, 13.4], 7.2), 15.0, currents[1]);
    solid_pot(1500.0, 0.1 * MM, vec![primary, secondary])
}

/// A gapped pot core with thick walls (half a post) of a large permeability round the air of `pot`; one turn, 1 A.
pub fn gapped_pot(pot: &GappedPot, permeability: f64) -> Model {
    let thickness = 0.5 * pot.post;
    let form = Form::Pot {
        wall: PotWall::OuterDiameter(2.0 * (pot.wall + thickness)),
        wall_inner_diameter: 2.0 * pot.wall,
        post_diameter: 2.0 * pot.post,
        hole_diameter: 0.0,
        height: 2.0 * (pot.half_window + thickness),
        window_height: 2.0 * pot.half_window,
    };
    let coil = Coil { radii: pot.winding, heights: [-pot.half_window, pot.half_window] };
    let windings = vec![winding(&coil, 1.0, 1.0)];
    Model { core: core(form), gaps: post_gap(2.0 * pot.half_gap), windings, ..bare(permeability) }
}

/// How the chords of a polygon stand to the circle.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Chords {
    /// Corners on the circle: less iron than the sphere, so less inductance.
    Inside,
    /// Chords touch the circle: more iron, more inductance.
    Outside,
}

/// A sphere drawn as a half polygon of `n_chords`, with its coil; one turn, 1 A.
pub fn sphere(case: &SphereCoil, n_chords: usize, chords: Chords) -> Model {
    let half_angle = 0.5 * PI / n_chords as f64;
    let radius = match chords {
        Chords::Inside => case.radius,
        Chords::Outside => case.radius / half_angle.cos(),
    };
    let corner = |i: usize| {
        let angle = -0.5 * PI + 2.0 * half_angle * i as f64;
        let r = if i == 0 || i == n_chords { 0.0 } else { radius * angle.cos() };
        Corner { at: Point { r, z: radius * angle.sin() }, fillet_radius: 0.0 }
    };
    let outline = (0..=n_chords).map(corner).collect();
    let part = Part { name: "sphere".to_owned(), material: MaterialId(0), outline };
    Model {
        parts: vec![part],
        windings: vec![winding(&case.coil, 1.0, 1.0)],
        ..bare(case.permeability)
    }
}
