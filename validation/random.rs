//! Random cases, drawn from their ranges.

use crate::coils::Coil;
use crate::dice::Dice;
use crate::modes::GappedPot;
use crate::sphere::SphereCoil;

/// An air coil with shape ratios log-uniform: mean radius 1–100 mm, width/mean radius 0.02–1.9, height/mean radius 0.02–20,
/// one in ten solid (inner radius 0), at any height.
pub fn air_coil(dice: &mut Dice) -> Coil {
    let mean = dice.log_uniform(1e-3, 0.1);
    let width = mean * dice.log_uniform(0.02, 1.9);
    let height = mean * dice.log_uniform(0.02, 20.0);
    let middle = mean * dice.uniform(-1.0, 1.0);
    let solid = dice.with(0.1);
    let radii = if solid { [0.0, 2.0 * mean] } else { [mean - 0.5 * width, mean + 0.5 * width] };
    Coil { radii, heights: [middle - 0.5 * height, middle + 0.5 * height] }
}

/// Two air coils that stand apart or above one another by 0.01–1 of the smaller one's size, turns 10–1000 each,
/// and currents with either sign.
pub fn coil_pair(dice: &mut Dice) -> [(Coil, f64, f64); 2] {
    let first = air_coil(dice);
    let second = air_coil(dice);
    let size = |c: &Coil| (c.radii[1] - c.radii[0]).min(c.heights[1] - c.heights[0]);
    let clearance = size(&first).min(size(&second)) * dice.log_uniform(0.01, 1.0);
    let placed = if dice.with(0.5) {
        second.raised(first.heights[1] + clearance - second.heights[0])
    } else {
        let shift = first.radii[1] + clearance - second.radii[0];
        Coil { radii: [second.radii[0] + shift, second.radii[1] + shift], heights: second.heights }
    };
    [first, placed].map(|coil| {
        let current = dice.log_uniform(0.1, 10.0) * if dice.with(0.5) { 1.0 } else { -1.0 };
        (coil, dice.log_uniform(10.0, 1000.0).round(), current)
    })
}

/// A gapped pot with ideal walls: post 2–10 mm, window 0.2–2.5 posts wide and 0.6–5 posts high, gap 0.01–0.8 posts
/// (at most half the window), winding from the post to the wall or clear of both.
pub fn gapped_pot_case(dice: &mut Dice) -> GappedPot {
    let post = dice.log_uniform(2e-3, 10e-3);
    let wall = post * (1.0 + dice.log_uniform(0.2, 2.5));
    let half_window = 0.5 * post * dice.log_uniform(0.6, 5.0);
    let half_gap = (0.5 * post * dice.log_uniform(0.01, 0.8)).min(0.5 * half_window);
    let full = dice.with(0.5);
    let width = wall - post;
    let winding = if full {
        [post, wall]
    } else {
        [post + width * dice.uniform(0.05, 0.3), wall - width * dice.uniform(0.05, 0.3)]
    };
    GappedPot { post, wall, half_gap, half_window, winding }
}

/// A sphere of 2–20 mm with a coil round it: clearance 0.05–1 radii, section 0.1–1 radii, moved up or down by up to a
/// radius, permeability 2–5000.
pub fn sphere_coil(dice: &mut Dice) -> SphereCoil {
    let radius = dice.log_uniform(2e-3, 20e-3);
    let inner = radius * (1.0 + dice.log_uniform(0.05, 1.0));
    let outer = inner + radius * dice.log_uniform(0.1, 1.0);
    let height = radius * dice.log_uniform(0.1, 1.0);
    let middle = radius * dice.uniform(-1.0, 1.0);
    let coil =
        Coil { radii: [inner, outer], heights: [middle - 0.5 * height, middle + 0.5 * height] };
    SphereCoil { radius, permeability: dice.log_uniform(2.0, 5000.0), coil }
}
