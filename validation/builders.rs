//! Models of the reference sections and of the random cases.

use crate::coils::Coil;
use crate::modes::GappedPot;
use crate::sphere::SphereCoil;
use gapwright::input;
use gapwright::model::{
    Across, Core, Corner, Form, Gap, Law, Material, MaterialId, Model, Part, Point, PotWall,
    Section, Winding,
};
use std::f64::consts::PI;

const MM: f64 = 1e-3;

/// Nothing but one material of constant permeability.
pub fn bare(permeability: f64) -> Model {
    let law = Law::Constant { permeability };
    Model { materials: vec![Material { name: "core".to_owned(), law }], ..Model::default() }
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

/// A section of `field_cases.json` by its sheet.
fn section(sheet: &str) -> Model {
    let no_files = |path: &str| Err(format!("{path}: these sheets name no files"));
    let read = input::read(sheet, "section.toml", &no_files);
    read.unwrap_or_else(|found| panic!("{}", found[0].message)).model
}

/// R1: gapped pot core with a hole, 42 turns, 1.8 A.
pub fn r1() -> Model {
    section(include_str!("references/R1.toml"))
}

/// R5: solid post, gap 1 mm, 60 turns; the permeability is 1500 in the reference.
pub fn r5(permeability: f64, turns: f64, current: f64) -> Model {
    let mut model = section(include_str!("references/R5.toml"));
    model.materials[0].law = Law::Constant { permeability };
    model.windings[0].sections[0].turns = turns;
    model.windings[0].current = current;
    model
}

/// R7: air coil of 100 turns, 1 A.
pub fn r7() -> Model {
    section(include_str!("references/R7.toml"))
}

/// R8: rod with a short winding of 80 turns, 1 A.
pub fn r8() -> Model {
    section(include_str!("references/R8.toml"))
}

/// R9: the core of R5 with a gap of 0.1 mm and two windings of 30 and 15 turns.
pub fn r9(currents: [f64; 2]) -> Model {
    let coil =
        |radii: [f64; 2]| Coil { radii: radii.map(|r| r * MM), heights: [-7.2 * MM, 7.2 * MM] };
    let primary = winding(&coil([8.2, 10.4]), 30.0, currents[0]);
    let secondary = winding(&coil([11.0, 13.4]), 15.0, currents[1]);
    let core = section(include_str!("references/R5.toml"));
    Model { gaps: post_gap(0.1 * MM), windings: vec![primary, secondary], ..core }
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
