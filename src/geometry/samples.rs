//! Models of the reference sections R1, R5, R7, R8 and others for unit tests (lengths in millimetres here, in metres in the
//! model).

pub use crate::model::{Across, Form, Model, PotWall};
use crate::model::{Core, Corner, Gap, Law, Material, MaterialId, Part, Point, Section, Winding};

const MM: f64 = 1e-3;

/// A model of nothing but one constant material.
pub fn empty() -> Model {
    of(2000.0)
}

/// A model of nothing but one material of that permeability.
fn of(permeability: f64) -> Model {
    let law = Law::Constant { permeability };
    let materials = vec![Material { name: "ferrite".to_string(), law }];
    Model { title: "test".to_string(), materials, ..Model::default() }
}

/// A core of a form without fillets and joint.
pub fn core(form: Form) -> Core {
    Core { material: MaterialId(0), form, corner_radius: 0.0, joint: 0.0 }
}

/// A winding of one section, 1 A [mm].
pub fn winding(name: &str, turns: f64, radii: [f64; 2], heights: [f64; 2]) -> Winding {
    let section = Section { turns, radii: radii.map(|x| x * MM), heights: heights.map(|x| x * MM) };
    Winding { name: name.to_string(), sections: vec![section], current: 1.0, ripple: 0.0 }
}

/// A gap [mm].
pub fn gap(name: &str, across: Across, length: f64, center: f64) -> Gap {
    Gap { name: name.to_string(), across, length: length * MM, center: center * MM }
}

/// A part with sharp corners [mm].
pub fn part(name: &str, corners: &[(f64, f64)]) -> Part {
    let outline = corners
        .iter()
        .map(|&(r, z)| Corner { at: Point { r: r * MM, z: z * MM }, fillet_radius: 0.0 })
        .collect();
    Part { name: name.to_string(), material: MaterialId(0), outline }
}

/// R1: gapped pot core with a hole.
pub fn r1() -> Model {
    let form = Form::Pot {
        wall: PotWall::OuterDiameter(25.5 * MM),
        wall_inner_diameter: 21.2 * MM,
        post_diameter: 11.5 * MM,
        hole_diameter: 5.4 * MM,
        height: 16.1 * MM,
        window_height: 11.0 * MM,
    };
    Model {
        core: Some(core(form)),
        gaps: vec![gap("post gap", Across::Post, 0.3, 0.0)],
        windings: vec![winding("main", 42.0, [6.6, 10.2], [-4.9, 4.9])],
        ..empty()
    }
}

/// R5: gapped pot core, solid post.
pub fn r5() -> Model {
    let form = Form::Pot {
        wall: PotWall::OuterDiameter(32.0 * MM),
        wall_inner_diameter: 28.0 * MM,
        post_diameter: 14.0 * MM,
        hole_diameter: 0.0,
        height: 23.0 * MM,
        window_height: 16.0 * MM,
    };
    Model {
        core: Some(core(form)),
        gaps: vec![gap("post gap", Across::Post, 1.0, 0.0)],
        windings: vec![winding("main", 60.0, [8.2, 13.4], [-7.2, 7.2])],
        ..of(1500.0)
    }
}

/// R7: air coil.
pub fn r7() -> Model {
    Model { windings: vec![winding("coil", 100.0, [20.0, 30.0], [-5.0, 5.0])], ..empty() }
}

/// R8: rod with a short winding.
pub fn r8() -> Model {
    let form = Form::Rod { diameter: 10.0 * MM, hole_diameter: 0.0, height: 100.0 * MM };
    Model {
        core: Some(core(form)),
        windings: vec![winding("coil", 80.0, [5.5, 7.0], [-10.0, 10.0])],
        ..of(500.0)
    }
}

/// A drum core whose winding fills the post's height.
pub fn drum() -> Model {
    let form = Form::Drum {
        flange_diameter: 12.0 * MM,
        post_diameter: 6.0 * MM,
        hole_diameter: 0.0,
        height: 10.0 * MM,
        window_height: 7.0 * MM,
    };
    Model {
        core: Some(core(form)),
        windings: vec![winding("coil", 50.0, [3.0, 5.0], [-3.5, 3.5])],
        ..empty()
    }
}

/// R1 with another gap [mm].
pub fn r1_with_gap(length: f64) -> Model {
    Model { gaps: vec![gap("post gap", Across::Post, length, 0.0)], ..r1() }
}

/// All samples by name.
pub fn all() -> Vec<(&'static str, Model)> {
    let mut rounded = r1();
    if let Some(core) = &mut rounded.core {
        core.corner_radius = 0.5 * MM;
        core.joint = 2e-6;
    }
    let spacer = Model { gaps: vec![gap("shim", Across::Spacer, 0.2, 0.0)], ..r5() };
    vec![
        ("R1", r1()),
        ("R5", r5()),
        ("R7", r7()),
        ("R8", r8()),
        ("drum", drum()),
        ("R1 fillets and joint", rounded),
        ("R5 spacer", spacer),
        ("R1 gap 10 mm", r1_with_gap(10.0)),
        ("R1 gap 0.05 mm", r1_with_gap(0.05)),
        ("R1 gap 0.005 mm", r1_with_gap(0.005)),
    ]
}

/// The same model with every length doubled.
pub fn doubled(model: &Model) -> Model {
    let mut model = model.clone();
    if let Some(core) = &mut model.core {
        core.corner_radius *= 2.0;
        core.joint *= 2.0;
        match &mut core.form {
            Form::Pot {
                wall,
                wall_inner_diameter,
                post_diameter,
                hole_diameter,
                height,
                window_height,
            } => {
                match wall {
                    PotWall::OuterDiameter(diameter) => *diameter *= 2.0,
                    PotWall::OuterLegsArea(area) => *area *= 4.0,
                }
                for x in [wall_inner_diameter, post_diameter, hole_diameter, height, window_height]
                {
                    *x *= 2.0;
                }
            }
            Form::Drum { flange_diameter, post_diameter, hole_diameter, height, window_height } => {
                for x in [flange_diameter, post_diameter, hole_diameter, height, window_height] {
                    *x *= 2.0;
                }
            }
            Form::Rod { diameter, hole_diameter, height } => {
                for x in [diameter, hole_diameter, height] {
                    *x *= 2.0;
                }
            }
        }
    }
    for gap in &mut model.gaps {
        gap.length *= 2.0;
        gap.center *= 2.0;
    }
    for section in model.windings.iter_mut().flat_map(|w| &mut w.sections) {
        section.radii = section.radii.map(|x| 2.0 * x);
        section.heights = section.heights.map(|x| 2.0 * x);
    }
    for corner in model.parts.iter_mut().flat_map(|p| &mut p.outline) {
        corner.at = Point { r: 2.0 * corner.at.r, z: 2.0 * corner.at.z };
        corner.fillet_radius *= 2.0;
    }
    model
}
