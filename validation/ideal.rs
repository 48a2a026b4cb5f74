//! Models with ideal walls: iron of permeability 1/ε is normal to the field, a barrier of permeability ε is tight to it.
//!
//! Two values of ε, the second twice the first, carry a coenergy to ε = 0: the walls' share is of the order ε, what the
//! straight line leaves is its square.

use crate::builders::{bare, winding};
use crate::cell::Cell;
use crate::coils::Coil;
use gapwright::model::{Corner, Law, Material, MaterialId, Model, Part, Point};

/// The materials of every model here: the core's own law, ideal iron, barrier.
const CORE: MaterialId = MaterialId(0);
const IRON: MaterialId = MaterialId(1);
const BARRIER: MaterialId = MaterialId(2);

/// The smaller ε. Iron of 1e6 and a barrier of 1e-6.
pub const SMALL: f64 = 1e-6;

/// A post over its mirror image, in a window closed by flux lines (all in one length unit).
#[derive(Debug, Clone, Copy)]
pub struct Post {
    pub radius: f64,
    /// Distance to the mirror plane: half the gap of the model.
    pub gap: f64,
    /// Height of the window above the post's face.
    pub side: f64,
    pub width: f64,
}

/// A material list with the core's law.
fn with_walls(law: Law, epsilon: f64, parts: Vec<Part>, coil: &Coil, current: f64) -> Model {
    let material = |name: &str, law| Material { name: name.to_owned(), law };
    let constant = |permeability| Law::Constant { permeability };
    let materials = vec![
        material("core", law),
        material("ideal iron", constant(1.0 / epsilon)),
        material("barrier", constant(epsilon)),
    ];
    Model { materials, parts, windings: vec![winding(coil, 1.0, current)], ..bare(1.0) }
}

/// A ring or disc of rectangular section.
fn block(name: &str, material: MaterialId, radii: [f64; 2], heights: [f64; 2]) -> Part {
    let corner = |r: f64, z: f64| Corner { at: Point { r, z }, fillet_radius: 0.0 };
    let ([inner, outer], [bottom, top]) = (radii, heights);
    let outline =
        vec![corner(inner, bottom), corner(outer, bottom), corner(outer, top), corner(inner, top)];
    Part { name: name.to_owned(), material, outline }
}

/// A block and its mirror image below z = 0.
fn both(name: &str, material: MaterialId, radii: [f64; 2], heights: [f64; 2]) -> [Part; 2] {
    let below = [-heights[1], -heights[0]];
    [
        block(&format!("upper {name}"), material, radii, heights),
        block(&format!("lower {name}"), material, radii, below),
    ]
}

/// A coil on a rod between ideal plates inside a tube that no flux leaves; the plates are shut in as well, so the tube
/// carries no flux in sum, like one period of an endless row.
pub fn cell(cell: &Cell, epsilon: f64) -> Model {
    let (half, wall) = (0.5 * cell.period, 0.25 * cell.tube);
    let mut parts = vec![block("rod", CORE, [0.0, cell.rod], [-half, half])];
    parts.extend(both("plate", IRON, [0.0, cell.tube], [half, half + wall]));
    parts.extend(both("lid", BARRIER, [0.0, cell.tube], [half + wall, half + 2.0 * wall]));
    let whole = [-half - 2.0 * wall, half + 2.0 * wall];
    parts.push(block("tube", BARRIER, [cell.tube, cell.tube + wall], whole));
    let coil = Coil { radii: cell.radii, heights: [-0.5 * cell.height, 0.5 * cell.height] };
    with_walls(Law::Constant { permeability: cell.permeability }, epsilon, parts, &coil, 1.0)
}

/// Inner and outer radius, and the height, of the coil that drives [`post`].
pub fn post_coil(post: &Post) -> ([f64; 2], f64) {
    let wall = 0.5 * post.side;
    let inner = post.radius + post.width + wall;
    ([inner, inner + 0.2 * post.width], 2.0 * (post.gap + post.side + wall))
}

/// A post and its mirror image, closed by barriers round their window; the coil stands outside these, between plates
/// of ideal iron, where its own field is the one of an endless solenoid.
pub fn post(post: &Post, epsilon: f64) -> Model {
    let ([inner, outer], height) = post_coil(post);
    let (half, rim) = (0.5 * height, post.radius + post.width);
    let iron = 0.5 * post.radius.max(post.side);
    let mut parts: Vec<Part> = both("post", IRON, [0.0, post.radius], [post.gap, half]).into();
    let shelf = [post.gap + post.side, half];
    parts.extend(both("shelf", BARRIER, [post.radius, rim], shelf));
    parts.push(block("tube", BARRIER, [rim, inner], [-half, half]));
    parts.extend(both("plate", IRON, [0.0, outer + iron], [half, half + iron]));
    parts.push(block("wall", IRON, [outer, outer + iron], [-half, half]));
    let coil = Coil { radii: [inner, outer], heights: [-half, half] };
    with_walls(Law::Constant { permeability: 1.0 }, epsilon, parts, &coil, 1.0)
}

/// A rod between ideal plates with a coil of full height, closed by a wall of ideal iron at the coil's outside: one
/// period of an endless solenoid, without a field outside.
pub fn solenoid(law: Law, rod: f64, coil: &Coil, current: f64, epsilon: f64) -> Model {
    let ([_, outer], [bottom, top]) = (coil.radii, coil.heights);
    let iron = 0.5 * outer;
    let mut parts = vec![block("rod", CORE, [0.0, rod], [bottom, top])];
    parts.extend(both("plate", IRON, [0.0, outer + iron], [top, top + iron]));
    parts.push(block("wall", IRON, [outer, outer + iron], [bottom, top]));
    with_walls(law, epsilon, parts, coil, current)
}
