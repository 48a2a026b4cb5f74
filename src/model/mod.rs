//! The problem as plain SI data: materials, core, gaps, windings, parts, wishes.
//!
//! Knows nothing of text, meshes or solvers. Every length is in metres, r from the axis, z up.

mod form;
mod law;

pub use form::Dimensions;
pub use law::{BhTable, Interpolation, Law, LawError, LawPoint};

use crate::units::{Ampere, Henry, Meter};

/// A point of the half plane: radius and height [m].
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Point {
    pub r: Meter,
    pub z: Meter,
}

/// Index into [`Model::materials`].
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct MaterialId(pub u16);

/// A named magnetic material.
#[derive(Debug, Clone, PartialEq)]
pub struct Material {
    pub name: String,
    pub law: Law,
}

/// How the outer wall of a pot core is stated.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum PotWall {
    /// Outer diameter [m].
    OuterDiameter(Meter),
    /// Summed section of outer legs that are not round [m²]: replaced by a round wall of equal section.
    OuterLegsArea(f64),
}

/// The form of a core; diameters and full heights [m], the middle at z = 0.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Form {
    Pot {
        wall: PotWall,
        wall_inner_diameter: Meter,
        post_diameter: Meter,
        hole_diameter: Meter,
        height: Meter,
        window_height: Meter,
    },
    Drum {
        flange_diameter: Meter,
        post_diameter: Meter,
        hole_diameter: Meter,
        height: Meter,
        window_height: Meter,
    },
    Rod {
        diameter: Meter,
        hole_diameter: Meter,
        height: Meter,
    },
}

/// A core given by its form.
#[derive(Debug, Clone, PartialEq)]
pub struct Core {
    pub material: MaterialId,
    pub form: Form,
    /// Radius of the window's corners [m], 0 for sharp ones.
    pub corner_radius: Meter,
    /// Residual gap of the mating faces [m], 0 for none.
    pub joint: Meter,
}

/// Which leg a gap crosses.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Across {
    Post,
    Wall,
    /// The halves moved apart: crosses every leg, the heights grow.
    Spacer,
}

/// A gap in the core.
#[derive(Debug, Clone, PartialEq)]
pub struct Gap {
    pub name: String,
    pub across: Across,
    pub length: Meter,
    /// Height of the gap's middle [m]; 0 for a spacer.
    pub center: Meter,
}

/// One rectangular winding section; several are in series.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Section {
    pub turns: f64,
    /// Inner and outer radius [m].
    pub radii: [Meter; 2],
    /// Bottom and top [m].
    pub heights: [Meter; 2],
}

/// A winding: sections in series that carry one current.
#[derive(Debug, Clone, PartialEq)]
pub struct Winding {
    pub name: String,
    pub sections: Vec<Section>,
    /// Current [A]; its sign is the sense.
    pub current: Ampere,
    /// Peak-to-peak ripple [A], 0 for none.
    pub ripple: Ampere,
}

impl Winding {
    /// Turns of all sections together.
    pub fn turns(&self) -> f64 {
        self.sections.iter().map(|s| s.turns).sum()
    }
}

/// One corner of a polygon, with the radius of its fillet (0 for sharp).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Corner {
    pub at: Point,
    pub fillet_radius: Meter,
}

/// A polygonal part of one material.
#[derive(Debug, Clone, PartialEq)]
pub struct Part {
    pub name: String,
    pub material: MaterialId,
    pub outline: Vec<Corner>,
}

/// Where the field is wanted: a point (`n_points` = 1) or a line.
#[derive(Debug, Clone, PartialEq)]
pub struct Probe {
    pub name: String,
    pub from: Point,
    pub to: Point,
    pub n_points: usize,
}

impl Probe {
    /// Its points, equally spaced from `from` to `to`.
    pub fn points(&self) -> impl Iterator<Item = Point> + '_ {
        let step = 1.0 / (self.n_points.max(2) - 1) as f64;
        let (a, b) = (self.from, self.to);
        (0..self.n_points).map(move |k| {
            let s = k as f64 * step;
            Point { r: a.r + s * (b.r - a.r), z: a.z + s * (b.z - a.z) }
        })
    }
}

/// Wanted relative width of the interval and the bound on the work.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Accuracy {
    /// (high − low)/value: of the inductance (linear) or of the coenergy (saturating).
    pub interval: f64,
    pub n_unknowns_max: usize,
}

impl Default for Accuracy {
    fn default() -> Self {
        Accuracy { interval: 1e-3, n_unknowns_max: 200_000 }
    }
}

/// Gap correction of the hand sum.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum GapCorrection {
    None,
    OneGapLength,
    Log,
    Corner,
    Roters,
    Factor(f64),
}

/// The number to be judged.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Estimate {
    pub claim: Claim,
    pub gap_correction: GapCorrection,
    /// Relative tolerance of the verdict.
    pub tolerance: f64,
}

/// What the estimate claims.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Claim {
    Inductance(Henry),
    InductanceFactor(Henry),
    /// Nothing stated: the hand sum is judged.
    HandSum,
}

/// Which inductance a requirement speaks of.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum InductanceKind {
    /// λ/I.
    Apparent,
    /// dλ/dI at the bias.
    Incremental,
}

/// A promise to be checked.
#[derive(Debug, Clone, PartialEq)]
pub struct Requirement {
    /// Index into [`Model::windings`].
    pub winding: usize,
    pub current: Ampere,
    pub kind: InductanceKind,
    pub least: Option<Henry>,
    pub most: Option<Henry>,
}

/// Disc averaging and number of the hot spots.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct HotSpotWish {
    pub count: usize,
    /// Radius of the averaging disc [m].
    pub averaging: Meter,
}

impl Default for HotSpotWish {
    fn default() -> Self {
        HotSpotWish { count: 5, averaging: 0.2e-3 }
    }
}

/// The whole problem.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Model {
    pub title: String,
    pub materials: Vec<Material>,
    pub core: Option<Core>,
    pub gaps: Vec<Gap>,
    pub windings: Vec<Winding>,
    pub parts: Vec<Part>,
    pub probes: Vec<Probe>,
    pub accuracy: Accuracy,
    pub estimate: Option<Estimate>,
    pub requirements: Vec<Requirement>,
    pub hot_spots: HotSpotWish,
}

/// The thing of the sheet that a message is about.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Subject {
    Core,
    Gap(usize),
    Winding { winding: usize, section: usize },
    Part(usize),
    Material(usize),
    Probe(usize),
    Sheet,
}

/// Something in the model that cannot be: told in the user's words, placed by `input`.
#[derive(Debug, Clone, PartialEq, thiserror::Error)]
#[error("{message}")]
pub struct Fault {
    pub subject: Subject,
    /// The key below the subject, when one is to blame.
    pub key: Option<&'static str>,
    /// The other thing involved (the second of two overlapping shapes).
    pub other: Option<Subject>,
    /// What is wrong, with the numbers: lower case, no final stop.
    pub message: String,
    /// What to write instead.
    pub help: String,
}
