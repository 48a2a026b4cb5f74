//! Values for tests: the results, section, mesh and field of a gapped pot core, made by hand.

use crate::geometry::{Cap, Leg, Outline, Region, RegionId, RegionKind, samples};
use crate::mesh::{Chart, Mesh};
use crate::model::{MaterialId, Model, Point};
use crate::results::sample::CellValues;
use crate::results::{
    GapResult, Guaranteed, HotSpot, LedgerRow, PartResult, ProbePoint, ProbeResult,
    RequirementResult, Results, RippleCurrent, RipplePart, RippleResult, Round, Verdict,
    WindingResult,
};
use crate::solve::Solution;

/// Results of the size of a real run; the numbers are rounded and belong to no guarantee.
pub(crate) fn results() -> Results {
    let round = |n_unknowns, low, high| Round {
        n_unknowns,
        n_triangles: 2 * n_unknowns,
        n_cg_iterations: 4,
        n_newton_steps: 1,
        low,
        high,
    };
    Results {
        title: "Buoy charger choke".to_string(),
        n_unknowns: 2852,
        n_triangles: 1500,
        rounds: vec![
            round(540, 680e-6, 720e-6),
            round(1100, 699e-6, 702e-6),
            round(2852, 700.3e-6, 700.95e-6),
        ],
        wanted: 1e-3,
        reached: true,
        unresolved: None,
        inductance: Some(Guaranteed { value: 700.616e-6, low: 700.301e-6, high: 700.949e-6 }),
        inductance_factor: Some(Guaranteed {
            value: 397.175e-9,
            low: 396.997e-9,
            high: 397.365e-9,
        }),
        incremental_inductance: Some(700.616e-6),
        coenergy: Guaranteed { value: 1.135e-3, low: 1.1345e-3, high: 1.1355e-3 },
        energy: 1.135e-3,
        is_linear: true,
        estimated_error: None,
        windings: vec![WindingResult {
            name: "main".to_string(),
            turns: 42.0,
            current: 1.8,
            flux_linkage: 1.2611e-3,
            flux_linkage_ends: Some([1.2605e-3, 1.2617e-3]),
        }],
        ledger: ledger(),
        inductance_based: Some(1.2034),
        gaps: gaps(),
        hot_spots: hot_spots(),
        parts: vec![PartResult {
            name: "post".to_string(),
            volume: 8.9e-7,
            energy: 3.5e-5,
            exceeded: [0.41, 0.38, 0.36],
            margin: Some(0.21),
        }],
        probes: vec![probe()],
        verdict: Some(Verdict {
            inductance: 0.70e-3,
            is_hand_sum: false,
            deviation: -0.000_879,
            tolerance: 0.03,
            within_tolerance: true,
            blame: "the post gap carries most of the difference".to_string(),
        }),
        ripple: Some(RippleResult {
            currents: vec![RippleCurrent { winding: "main".to_string(), trough: 1.5, peak: 2.1 }],
            parts: vec![RipplePart { name: "post".to_string(), swing: 0.12, peak: 0.44 }],
        }),
        requirements: requirements(),
        notes: vec![
            "the corner at r = 5.75 mm, z = 5.5 mm is sharp: the flux density there is an average"
                .to_string(),
        ],
    }
}

fn ledger() -> Vec<LedgerRow> {
    let row = |region: &str, share: f64, hand: Option<f64>| LedgerRow {
        region: region.to_string(),
        share,
        reluctance: Some(share / 397.175e-9),
        hand,
    };
    vec![
        row("post", 0.031, Some(81e3)),
        row("wall", 0.014, Some(36e3)),
        row("upper plate", 0.011, Some(27e3)),
        row("lower plate", 0.011, Some(27e3)),
        row("post gap", 0.724, Some(2.16e6)),
        row("main and its window", 0.187, None),
        row("outside", 0.022, None),
    ]
}

fn probe() -> ProbeResult {
    ProbeResult {
        name: "axis".to_string(),
        points: (0..3)
            .map(|i| ProbePoint {
                r: 1e-3,
                z: 1e-3 * f64::from(i),
                b_r: 0.1 / 3.0,
                b_z: 0.2,
                h_r: 1.0,
                h_z: 2.0,
                psi: 1e-7,
            })
            .collect(),
    }
}

fn hot_spots() -> Vec<HotSpot> {
    vec![
        HotSpot { part: "post".to_string(), r: 5.6e-3, z: 5.6e-3, flux_density: 0.512 },
        HotSpot { part: "post".to_string(), r: 5.6e-3, z: -5.6e-3, flux_density: 0.511 },
        HotSpot { part: "lower plate".to_string(), r: 10.5e-3, z: -5.7e-3, flux_density: 0.344 },
    ]
}

fn requirements() -> Vec<RequirementResult> {
    vec![RequirementResult {
        winding: "main".to_string(),
        current: 2.5,
        incremental: false,
        least: Some(650e-6),
        most: None,
        inductance: 700.6e-6,
        ends: Some([700.3e-6, 700.95e-6]),
        met: true,
        is_certain: true,
    }]
}

fn gaps() -> Vec<GapResult> {
    vec![GapResult {
        name: "1".to_string(),
        gap_based: Some(1.143),
        plain_reluctance: 2.947e6,
        force: 4.21,
        plain_force: 4.62,
    }]
}

/// The model of the same core.
pub(crate) fn model() -> Model {
    let mut model = samples::r1();
    model.title = "Buoy charger choke".to_string();
    model.materials[0].name = "soft_ferrite".to_string();
    model.windings[0].current = 1.8;
    model
}

/// A counter-clockwise rectangle, corners in millimetres.
pub(crate) fn rectangle(r: [f64; 2], z: [f64; 2]) -> Vec<Point> {
    let point = |r: f64, z: f64| Point { r: 1e-3 * r, z: 1e-3 * z };
    vec![point(r[0], z[0]), point(r[1], z[0]), point(r[1], z[1]), point(r[0], z[1])]
}

/// The section of the same core; segments are left out, the drawings do not use them.
pub(crate) fn outline() -> Outline {
    let region = |name: &str, kind, material: bool, polygons| Region {
        name: name.to_string(),
        kind,
        material: material.then_some(MaterialId(0)),
        permeability: 1.0,
        current_density: 0.0,
        polygons,
    };
    let post = vec![rectangle([2.7, 5.75], [-5.5, -0.15]), rectangle([2.7, 5.75], [0.15, 5.5])];
    let winding = RegionKind::Winding { winding: 0, section: 0 };
    Outline {
        points: vec![],
        segments: vec![],
        regions: vec![
            region("outside", RegionKind::Outside, false, vec![]),
            region("post", RegionKind::Leg(Leg::Post), true, post),
            region(
                "wall",
                RegionKind::Leg(Leg::Wall),
                true,
                vec![rectangle([10.6, 12.75], [-5.5, 5.5])],
            ),
            region(
                "upper plate",
                RegionKind::Leg(Leg::UpperPlate),
                true,
                vec![rectangle([2.7, 12.75], [5.5, 8.05])],
            ),
            region(
                "lower plate",
                RegionKind::Leg(Leg::LowerPlate),
                true,
                vec![rectangle([2.7, 12.75], [-8.05, -5.5])],
            ),
            region(
                "post gap",
                RegionKind::Gap { gap: 0, leg: Leg::Post },
                false,
                vec![rectangle([2.7, 5.75], [-0.15, 0.15])],
            ),
            region("main", winding, false, vec![rectangle([6.6, 10.2], [-4.9, 4.9])]),
        ],
        cap: Cap { center_z: 0.0, radius: 19e-3, n_facets: 8 },
    }
}

/// A smooth made-up field on a regular mesh over the section: ψ = B r²/2·exp(−(r/a)⁴ − (z/b)²), its B and shares.
#[derive(Debug, Clone, PartialEq)]
pub(crate) struct Field {
    pub mesh: Mesh,
    pub solution: Solution,
    pub cells: CellValues,
    pub shares: Vec<f64>,
}

const PEAK: f64 = 0.4;
const RADIUS: f64 = 9e-3;
const HEIGHT: f64 = 10e-3;

/// ψ [Wb/rad] of the made-up field.
fn psi(p: Point) -> f64 {
    0.5 * PEAK * p.r * p.r * (-(p.r / RADIUS).powi(4) - (p.z / HEIGHT).powi(2)).exp()
}

/// (B_r, B_z) [T] of the made-up field, by hand differentiation.
fn flux_density(p: Point) -> [f64; 2] {
    let bell = PEAK * (-(p.r / RADIUS).powi(4) - (p.z / HEIGHT).powi(2)).exp();
    [bell * p.r * p.z / (HEIGHT * HEIGHT), bell * (1.0 - 2.0 * (p.r / RADIUS).powi(4))]
}

/// Builds the field on an `n` × 2n grid of squares cut in two, plus one cap triangle that drawings must skip.
pub(crate) fn field(n: usize) -> Field {
    let step = 16e-3 / n as f64;
    let at = |i: usize, j: usize| (j * (n + 1) + i) as u32;
    let mut points = vec![];
    for j in 0..=2 * n {
        for i in 0..=n {
            points.push(Point { r: step * i as f64, z: step * j as f64 - 16e-3 });
        }
    }
    let mut triangles = vec![];
    for j in 0..2 * n {
        for i in 0..n {
            triangles.push([at(i, j), at(i + 1, j), at(i + 1, j + 1)]);
            triangles.push([at(i, j), at(i + 1, j + 1), at(i, j + 1)]);
        }
    }
    triangles.push([at(n, 0), at(n, 2), at(n, 1)]);
    let mut charts = vec![Chart::Inside; triangles.len()];
    charts[triangles.len() - 1] = Chart::Cap(0);
    let (edges, triangle_edges) = number_edges(&triangles);
    let vertex: Vec<f64> = points.iter().map(|&p| psi(p)).collect();
    let middle = |a: u32, b: u32| {
        let [p, q] = [points[a as usize], points[b as usize]];
        Point { r: 0.5 * (p.r + q.r), z: 0.5 * (p.z + q.z) }
    };
    let bubble =
        |&[a, b]: &[u32; 2]| psi(middle(a, b)) - 0.5 * (vertex[a as usize] + vertex[b as usize]);
    let solution = Solution { edge: edges.iter().map(bubble).collect(), vertex: vertex.clone() };
    let norm = |p: Point| flux_density(p)[0].hypot(flux_density(p)[1]);
    let b_corner = triangles.iter().map(|t| t.map(|v| norm(points[v as usize]))).collect();
    let b: Vec<[f64; 2]> = triangles.iter().map(|t| flux_density(middle(t[0], t[2]))).collect();
    let cells = CellValues {
        h: b.iter().map(|b| b.map(|x| x / crate::units::MU0)).collect(),
        b,
        permeability: vec![1.0; triangles.len()],
        b_corner,
    };
    let shares = vec![1e-9; triangles.len()];
    let mesh = Mesh {
        on_axis: points.iter().map(|p| p.r == 0.0).collect(),
        parents: vec![[u32::MAX; 2]; points.len()],
        level_sizes: vec![points.len()],
        regions: vec![RegionId(0); triangles.len()],
        points,
        triangles,
        triangle_edges,
        edges,
        charts,
        cap: outline().cap,
    };
    Field { mesh, solution, cells, shares }
}

/// Numbers the edges of `triangles` in order of first appearance; local edges (a,b), (b,c), (c,a).
fn number_edges(triangles: &[[u32; 3]]) -> (Vec<[u32; 2]>, Vec<[u32; 3]>) {
    let mut numbers = std::collections::BTreeMap::new();
    let mut edges = vec![];
    let mut triangle_edges = vec![];
    for t in triangles {
        triangle_edges.push([0, 1, 2].map(|k| {
            let (a, b) = (t[k], t[(k + 1) % 3]);
            *numbers.entry((a.min(b), a.max(b))).or_insert_with(|| {
                edges.push([a, b]);
                edges.len() as u32 - 1
            })
        }));
    }
    (edges, triangle_edges)
}
