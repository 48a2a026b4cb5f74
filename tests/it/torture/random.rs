//! Random sections from fixed seeds: cores, gaps, windings, polygons; touching and overlapping ones included.

use super::draft::{Coil, Draft, Law};
use crate::dice::Dice;

/// Radii and heights that the section already has, for things that are to touch, and the boxes of its shapes.
struct Places {
    radii: Vec<f64>,
    heights: Vec<f64>,
    boxes: Vec<[f64; 4]>,
    size: f64,
}

/// Tries to find a free place for a shape.
const N_TRIES: usize = 12;

impl Places {
    fn radius(&self, dice: &mut Dice) -> f64 {
        match dice.below(4) {
            0 | 1 => dice.pick(&self.radii),
            2 => 0.125 * dice.below(13) as f64 * self.size,
            _ => dice.uniform(0.0, 1.5) * self.size,
        }
    }

    fn height(&self, dice: &mut Dice) -> f64 {
        match dice.below(4) {
            0 | 1 => dice.pick(&self.heights),
            2 => 0.125 * (dice.below(25) as f64 - 12.0) * self.size,
            _ => dice.uniform(-1.5, 1.5) * self.size,
        }
    }

    /// Keeps what was drawn, so that later shapes may touch it.
    fn keep(&mut self, radii: [f64; 2], heights: [f64; 2]) {
        self.radii.extend(radii);
        self.heights.extend(heights);
    }

    fn fill(&mut self, radii: [f64; 2], heights: [f64; 2]) {
        self.boxes.push([radii[0], radii[1], heights[0], heights[1]]);
    }

    /// Whether a box shares no area with those that are there.
    fn is_free(&self, [r0, r1]: [f64; 2], [z0, z1]: [f64; 2]) -> bool {
        let slack = 1e-9 * self.size;
        self.boxes.iter().all(|b| {
            b[1] <= r0 + slack || r1 <= b[0] + slack || b[3] <= z0 + slack || z1 <= b[2] + slack
        })
    }

    /// A rectangle; in a free place if one is found within some tries.
    fn rectangle(&self, dice: &mut Dice) -> ([f64; 2], [f64; 2]) {
        let mut found = ([0.0; 2], [0.0; 2]);
        for _ in 0..N_TRIES {
            let [a, b] = [self.radius(dice), self.radius(dice)];
            let [c, d] = [self.height(dice), self.height(dice)];
            found = ([a.min(b), a.max(b)], [c.min(d), c.max(d)]);
            if a != b && c != d && self.is_free(found.0, found.1) {
                break;
            }
        }
        found
    }
}

/// A random section; seed → the same section on every machine.
pub fn section(seed: u64) -> Draft {
    let mut dice = Dice(seed);
    let size = dice.log_uniform(1e-5, 1.0);
    let mut draft = Draft { unit: "m", ..Draft::new(1.0) };
    draft.laws = (0..2).map(|_| law(&mut dice)).collect();
    let mut places = Places {
        radii: vec![0.0, size],
        heights: vec![0.0, 0.5 * size, -0.5 * size],
        boxes: vec![],
        size,
    };
    if dice.with(0.75) {
        core(&mut dice, size, &mut draft, &mut places);
    }
    for _ in 0..dice.below(3) {
        part(&mut dice, &mut draft, &mut places);
    }
    for _ in 0..1 + dice.below(3) {
        coil(&mut dice, &mut draft, &mut places);
    }
    if dice.with(0.3) {
        part(&mut dice, &mut draft, &mut places);
    }
    draft
}

fn law(dice: &mut Dice) -> Law {
    match dice.below(10) {
        0 => Law::Permeability(dice.log_uniform(1e-3, 1.0)),
        1 => Law::Permeability(1.0),
        2 => Law::Permeability(dice.log_uniform(1e4, 1e5)),
        3 => Law::Saturation(dice.log_uniform(10.0, 5000.0), dice.uniform(0.3, 2.0)),
        _ => Law::Permeability(dice.log_uniform(5.0, 5000.0)),
    }
}

fn core(dice: &mut Dice, size: f64, draft: &mut Draft, places: &mut Places) {
    let form = dice.pick(&["pot", "pot", "drum", "rod"]);
    let height = size * dice.log_uniform(0.2, 5.0);
    let window = height * dice.uniform(0.3, 0.95);
    let post = size * dice.uniform(0.1, 0.6);
    let wall = post + (size - post) * dice.uniform(0.2, 0.95);
    let hole = if dice.with(0.4) { post * dice.uniform(0.05, 0.9) } else { 0.0 };
    // The sheet speaks of diameters.
    let mut keys = vec![("height", height), ("hole_diameter", 2.0 * hole)];
    let outer = match form {
        "pot" => {
            keys.extend([("outer_diameter", 2.0 * size), ("wall_inner_diameter", 2.0 * wall)]);
            wall
        }
        "drum" => {
            keys.push(("flange_diameter", 2.0 * size));
            size
        }
        // A coil round the rod.
        _ => 2.0 * post,
    };
    if form == "rod" {
        keys.push(("diameter", 2.0 * post));
    } else {
        keys.extend([("post_diameter", 2.0 * post), ("window_height", window)]);
        if dice.with(0.2) {
            keys.push(("corner_radius", 0.5 * window.min(outer - post) * dice.uniform(0.02, 1.1)));
        }
        if dice.with(0.2) {
            keys.push(("joint", height * dice.log_uniform(1e-5, 1e-2)));
        }
    }
    draft.core = Some((0, form, keys));
    let leg = if form == "rod" { height } else { window };
    let outmost = if form == "rod" { post } else { size };
    places.keep([post, outer], [-0.5 * leg, 0.5 * leg]);
    places.keep([hole, outmost], [-0.5 * height, 0.5 * height]);
    places.fill([hole, post], [-0.5 * height, 0.5 * height]);
    if form != "rod" {
        places.fill([hole, size], [0.5 * window, 0.5 * height]);
        places.fill([hole, size], [-0.5 * height, -0.5 * window]);
    }
    if form == "pot" {
        places.fill([wall, size], [-0.5 * height, 0.5 * height]);
    }
    // Most things go into the window.
    places.radii.extend([post, outer, post, outer]);
    for _ in 0..dice.below(3) {
        gap(dice, form, leg, draft, places);
    }
}

fn gap(dice: &mut Dice, form: &str, leg: f64, draft: &mut Draft, places: &mut Places) {
    let across = match form {
        "pot" => dice.pick(&["post", "post", "wall", "spacer"]),
        "drum" => dice.pick(&["post", "post", "post", "spacer"]),
        _ => "post",
    };
    // Thin gaps make first meshes of 10 000 vertices: seldom, for the time.
    let least = if dice.with(0.05) { 1e-4 } else { 3e-3 };
    let length = leg * dice.log_uniform(least, 0.3);
    let center = match dice.below(4) {
        0 => 0.5 * (leg - length),
        1 => 0.5 * leg * dice.uniform(-1.0, 1.0),
        _ => 0.0,
    };
    draft.gaps.push((across, length, center));
    places.keep([0.0, places.size], [center - 0.5 * length, center + 0.5 * length]);
}

fn coil(dice: &mut Dice, draft: &mut Draft, places: &mut Places) {
    let mut sections = vec![];
    for _ in 0..if dice.with(0.2) { 2 } else { 1 } {
        let mut found = places.rectangle(dice);
        if draft.core.is_some() && dice.with(0.7) {
            for _ in 0..N_TRIES {
                found = in_window(dice, places);
                if places.is_free(found.0, found.1) {
                    break;
                }
            }
        }
        let (radii, heights) = found;
        places.keep(radii, heights);
        places.fill(radii, heights);
        sections.push((1.0 + dice.below(100) as f64, radii, heights));
    }
    let sign = if dice.with(0.3) { -1.0 } else { 1.0 };
    // Some 1e5 A/m of winding height, so that a core saturates now and then.
    let current = sign * places.size * dice.log_uniform(10.0, 1e4);
    draft.coils.push(Coil { current, sections });
}

/// The whole window or a half or a quarter of it, flush or with some room.
fn in_window(dice: &mut Dice, places: &Places) -> ([f64; 2], [f64; 2]) {
    let ([post, outer], half) = ([places.radii[2], places.radii[3]], places.heights[4]);
    let inset = if dice.with(0.4) { 0.0 } else { 0.1 * dice.uniform(0.0, 1.0) };
    let width = outer - post;
    let [from, to] = dice.pick(&[[0.0, 1.0], [0.0, 0.5], [0.5, 1.0]]);
    let [low, high] = dice.pick(&[[-1.0, 1.0], [-1.0, 0.0], [0.0, 1.0]]);
    (
        [post + width * (from + inset), post + width * (to - inset)],
        [half * (low + inset), half * (high - inset)],
    )
}

fn part(dice: &mut Dice, draft: &mut Draft, places: &mut Places) {
    let kind = dice.below(4);
    let mut corners = vec![];
    for _ in 0..N_TRIES {
        corners = match kind {
            0 => {
                let ([r0, r1], [z0, z1]) = places.rectangle(dice);
                vec![[r0, z0, 0.0], [r1, z0, 0.0], [r1, z1, 0.0], [r0, z1, 0.0]]
            }
            1 => (0..3).map(|_| [places.radius(dice), places.height(dice), 0.0]).collect(),
            _ => star(dice, places),
        };
        let (radii, heights) = extent(&corners);
        if places.is_free(radii, heights) {
            break;
        }
    }
    let (radii, heights) = extent(&corners);
    places.keep(radii, heights);
    places.fill(radii, heights);
    let touched = corners[dice.below(corners.len())];
    places.keep([touched[0]; 2], [touched[1]; 2]);
    if dice.with(0.3) {
        corners.reverse();
    }
    if dice.with(0.25) {
        let corner = dice.below(corners.len());
        corners[corner][2] = places.size * dice.log_uniform(1e-4, 0.3);
    }
    draft.parts.push((dice.below(2), corners));
}

fn extent(corners: &[[f64; 3]]) -> ([f64; 2], [f64; 2]) {
    let ends = |k: usize| {
        corners
            .iter()
            .fold([f64::INFINITY, f64::NEG_INFINITY], |[a, b], c| [a.min(c[k]), b.max(c[k])])
    };
    (ends(0), ends(1))
}

/// A polygon in the order of the angle round its centre; to the axis at most.
fn star(dice: &mut Dice, places: &Places) -> Vec<[f64; 3]> {
    let n = if dice.with(0.05) { 300 } else { 3 + dice.below(8) };
    let center = [dice.uniform(0.0, 2.0) * places.size, dice.uniform(-2.0, 2.0) * places.size];
    let radius = places.size * dice.log_uniform(0.01, 1.0);
    (0..n)
        .map(|k| {
            let (s, c) = (std::f64::consts::TAU * k as f64 / n as f64).sin_cos();
            let away = radius * dice.uniform(0.3, 1.0);
            [(center[0] + away * c).max(0.0), center[1] + away * s, 0.0]
        })
        .collect()
}
