//! Random sections from fixed seeds: cores, gaps, windings, polygons; touching and overlapping ones included.

use super::draft::{Coil, Draft, Law};

/// The splitmix64 sequence. Source: G. L. Steele, D. Lea, C. H. Flood, OOPSLA 2014 (constants from memory).
pub struct Dice(pub u64);

impl Dice {
    /// The next 64 bits.
    pub fn bits(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }

    /// Uniform in [low, high).
    pub fn uniform(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * ((self.bits() >> 11) as f64 / (1u64 << 53) as f64)
    }

    /// Uniform in the logarithm, in [low, high).
    pub fn log_uniform(&mut self, low: f64, high: f64) -> f64 {
        self.uniform(low.ln(), high.ln()).exp()
    }

    /// True with that probability.
    pub fn with(&mut self, probability: f64) -> bool {
        self.uniform(0.0, 1.0) < probability
    }

    /// A whole number below n.
    pub fn below(&mut self, n: usize) -> usize {
        (self.bits() % n.max(1) as u64) as usize
    }

    /// One of a list.
    pub fn pick<T: Copy>(&mut self, list: &[T]) -> T {
        list[self.below(list.len())]
    }
}

/// Radii and heights that the section already has, for things that are to touch.
struct Places {
    radii: Vec<f64>,
    heights: Vec<f64>,
    size: f64,
}

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

    fn ordered(dice: &mut Dice, one: impl Fn(&mut Dice) -> f64) -> [f64; 2] {
        let (a, b) = (one(dice), one(dice));
        [a.min(b), a.max(b)]
    }
}

/// A random section; seed → the same section on every machine.
pub fn section(seed: u64) -> Draft {
    let mut dice = Dice(seed);
    let size = dice.log_uniform(1e-5, 1.0);
    let mut draft = Draft { unit: "m", ..Draft::new(1.0) };
    draft.laws = (0..2).map(|_| law(&mut dice)).collect();
    let mut places =
        Places { radii: vec![0.0, size], heights: vec![0.0, 0.5 * size, -0.5 * size], size };
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
        _ => post,
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
    places.keep([post, outer], [-0.5 * leg, 0.5 * leg]);
    places.keep([hole, size], [-0.5 * height, 0.5 * height]);
    // Most things go into the window.
    places.radii.extend([post, outer, post, outer]);
    for _ in 0..dice.below(3) {
        gap(dice, form, leg, draft, places);
    }
}

fn gap(dice: &mut Dice, form: &str, leg: f64, draft: &mut Draft, places: &mut Places) {
    let across = match form {
        "pot" => dice.pick(&["post", "post", "wall", "spacer"]),
        _ => dice.pick(&["post", "post", "post", "spacer"]),
    };
    let length = leg * dice.log_uniform(1e-4, 0.3);
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
        // Into the window with some room, or anywhere.
        let in_window = draft.core.is_some() && dice.with(0.7);
        let (radii, heights) = if in_window {
            let ([post, outer], half) = ([places.radii[2], places.radii[3]], places.heights[4]);
            let inset = if dice.with(0.4) { 0.0 } else { 0.2 * dice.uniform(0.0, 1.0) };
            let (width, part) = (outer - post, dice.below(3));
            let [from, to] = [[0.0, 1.0], [0.0, 0.5], [0.5, 1.0]][part];
            let [low, high] = [[-1.0, 1.0], [-1.0, 0.0], [0.0, 1.0]][dice.below(3)];
            (
                [post + width * (from + 0.5 * inset), post + width * (to - 0.5 * inset)],
                [half * (low + inset * 0.5), half * (high - inset * 0.5)],
            )
        } else {
            (
                Places::ordered(dice, |dice| places.radius(dice)),
                Places::ordered(dice, |dice| places.height(dice)),
            )
        };
        places.keep(radii, heights);
        sections.push((1.0 + dice.below(100) as f64, radii, heights));
    }
    let sign = if dice.with(0.3) { -1.0 } else { 1.0 };
    // Some 1e5 A/m of winding height, so that a core saturates now and then.
    let current = sign * places.size * dice.log_uniform(10.0, 1e4);
    draft.coils.push(Coil { current, sections });
}

fn part(dice: &mut Dice, draft: &mut Draft, places: &mut Places) {
    let mut corners: Vec<[f64; 3]> = match dice.below(4) {
        0 => {
            let radii = Places::ordered(dice, |dice| places.radius(dice));
            let heights = Places::ordered(dice, |dice| places.height(dice));
            places.keep(radii, heights);
            let ([r0, r1], [z0, z1]) = (radii, heights);
            vec![[r0, z0, 0.0], [r1, z0, 0.0], [r1, z1, 0.0], [r0, z1, 0.0]]
        }
        1 => (0..3).map(|_| [places.radius(dice), places.height(dice), 0.0]).collect(),
        _ => star(dice, places),
    };
    if dice.with(0.3) {
        corners.reverse();
    }
    if dice.with(0.25) {
        let corner = dice.below(corners.len());
        corners[corner][2] = places.size * dice.log_uniform(1e-4, 0.3);
    }
    draft.parts.push((dice.below(2), corners));
}

/// A polygon in the order of the angle round its centre; to the axis at most.
fn star(dice: &mut Dice, places: &mut Places) -> Vec<[f64; 3]> {
    let n = if dice.with(0.05) { 300 } else { 3 + dice.below(8) };
    let center = [dice.uniform(0.0, 2.0) * places.size, dice.uniform(-2.0, 2.0) * places.size];
    let radius = places.size * dice.log_uniform(0.01, 1.0);
    let corners: Vec<[f64; 3]> = (0..n)
        .map(|k| {
            let (s, c) = (std::f64::consts::TAU * k as f64 / n as f64).sin_cos();
            let away = radius * dice.uniform(0.3, 1.0);
            [(center[0] + away * c).max(0.0), center[1] + away * s, 0.0]
        })
        .collect();
    let touched = corners[dice.below(n)];
    places.keep([touched[0]; 2], [touched[1]; 2]);
    corners
}
