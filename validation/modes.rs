//! Gapped posts in ideal iron by mode matching: exact but for a finite basis of the field in the gap's mouth.
//!
//! The air of a gapped post with ideal (infinitely permeable) walls is two cylinders that meet in the mouth r = a,
//! 0 < z < g of the gap (upper half; z = 0 is a mirror plane). With ψ = r·A_φ, µ0 = 1 and H_z = h(z) in the mouth:
//!
//! * in the gap, r < a:  ψ = h₀ r²/2 + Σ_n A_n r I₁(κ_n r) cos κ_n z, κ_n = nπ/g, so that a mode h_n of the mouth
//!   makes ψ(a) = Y¹_n h_n, Y¹ = a I₁/(κ I₀);
//! * in the window, a < r < b:  a part that depends on r alone, and modes cos λ_m z with ψ(a) = −Y²_m h²_m, where
//!   h²_m = (2/H) ∫ h cos λ_m z dz is the cosine component of h continued by 0 over the post's side (ideal iron: H_z = 0).
//!
//! Any h with the right ∫ h dz fulfils Ampère's law, so the energy
//! W(h) = 2π Σ over both ladders of (1/height) Y T², T = ∫ h cos, is stationary and smallest for the true h: **every
//! result is an upper bound of the inductance** (the complementary principle), and its error is quadratic in that of h.
//!
//! Basis: at the iron's right-angled corner h behaves like d^(−1/3), d^(1/3), d, d^(5/3) … (d the distance to it). With
//! x = z/g, (1 − x²)^(λ−1/2) C_{2j}^λ(x) for λ = 1/6 and for λ = 5/6 has the first two kinds times even polynomials, and
//! closed cosine integrals: T_j(ω) = (−1)^j Γ(λ + 1) (2/ω)^λ J_{2j+λ}(ω), T_0(0) = 1.
//!
//! The sums over the modes fall only like m^(−7/3); they are summed up to ω = 1500 and continued by the asymptotic form
//! of J: a mean part (an integral) and a swinging part (first term of Abel's summation).
//!
//! The walls are ideal and closed: the open infinite rod cannot be met by this formulation and is left out.

use crate::bessel::{GAMMA_1_6, j_orders, scaled};
use gapwright::units::Meter;
use nalgebra::{DMatrix, DVector};
use std::f64::consts::PI;

/// Argument ω of the Bessel functions up to which the ladders are summed term by term.
const OMEGA_MAX: f64 = 1500.0;

/// Functions of each family (λ = 1/6, λ = 5/6). Measured against the exact plane map: 4e-11 too high; more functions of
/// the second family are so nearly dependent on the first that the error of the tails (1e-9) shows.
pub const N_FUNCTIONS: [usize; 2] = [5, 1];

/// A pot core with ideal walls, solid post and a central gap; the winding fills the window's height.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct GappedPot {
    /// Radius of the post.
    pub post: Meter,
    /// Inner radius of the wall.
    pub wall: Meter,
    /// Half the gap.
    pub half_gap: Meter,
    /// Half the window's height, gap included.
    pub half_window: Meter,
    /// Inner and outer radius of the winding, within [post, wall].
    pub winding: [Meter; 2],
}

/// Inductance L/(µ0 N²) [m] of a gapped pot core with ideal walls: an upper bound, about 1e-8 above the exact value.
pub fn gapped_pot(pot: &GappedPot, n_functions: [usize; 2]) -> Meter {
    let window =
        Ladder { step: PI * pot.half_gap / pot.half_window, shift: 0.0, height: pot.half_window };
    let window_admittance = |lambda: f64| wall_admittance(lambda, pot.post, pot.wall);
    let mouth = least_energy(n_functions, pot.post, pot.half_gap, &window, window_admittance);
    // Ampère: 2g·h₀ = NI = 1.
    let half_mmf = 0.5;
    let in_gap = PI * half_mmf * half_mmf * pot.post * pot.post / (2.0 * pot.half_gap);
    4.0 * (in_gap + 2.0 * PI * half_mmf * half_mmf * mouth + 0.5 * winding_share(pot))
}

/// π H ∫ (2 H_z)² r dr/2 of the part of the window's field that depends on r alone, NI = 1 [m].
fn winding_share(pot: &GappedPot) -> f64 {
    let [r1, r2] = pot.winding;
    let width = r2 - r1;
    // H_z = 1/(2H) inside the winding, falling linearly to 0 at r2.
    let plain = 0.5 * (r1 * r1 - pot.post * pot.post);
    let falling = width * (r1 / 3.0 + width / 12.0);
    2.0 * PI * pot.half_window * (plain + falling) / (4.0 * pot.half_window * pot.half_window)
}

/// Permeance P/µ0 [m] between a solid post of radius `post` and a plane at `gap` below it, window of the given width and
/// height above the post's face closed by flux lines: an upper bound.
pub fn post_over_plane(post: Meter, gap: Meter, side: Meter, width: Meter) -> Meter {
    let height = gap + side;
    let window = Ladder { step: PI * gap / height, shift: 0.5, height };
    let admittance = |lambda: f64| flux_line_admittance(lambda, post, post + width);
    let mouth = least_energy(N_FUNCTIONS, post, gap, &window, admittance);
    PI * post * post / gap + 4.0 * PI * mouth
}

/// The plane counterpart of [`post_over_plane`]: fringing permeance over µ0 and depth [-] beyond the projected face.
pub fn edge_over_plane(gap: Meter, side: Meter, width: Meter) -> f64 {
    edge_over_plane_with(gap, side, width, N_FUNCTIONS)
}

/// [`edge_over_plane`] with stated numbers of functions.
fn edge_over_plane_with(gap: Meter, side: Meter, width: Meter, n_functions: [usize; 2]) -> f64 {
    let height = gap + side;
    let families = families(n_functions);
    let below = Ladder { step: PI, shift: 0.0, height: gap };
    let beside = Ladder { step: PI * gap / height, shift: 0.5, height };
    let mut form = ladder_form(&families, &below, gap, |k| 1.0 / k);
    form += ladder_form(&families, &beside, gap, |k| (k * width).tanh() / k);
    2.0 * least(&families, form)
}

/// Ladder of modes: ω_m = `step`·(m − `shift`) is the wavenumber times the mouth's height.
#[derive(Debug, Clone, Copy)]
struct Ladder {
    step: f64,
    shift: f64,
    /// Height of the region [m].
    height: f64,
}

/// One function of the mouth: order λ and index j.
#[derive(Debug, Clone, Copy)]
struct Function {
    order: f64,
    index: usize,
}

/// Both families of the basis in one list.
fn families(n_functions: [usize; 2]) -> Vec<Function> {
    let mut list = Vec::new();
    for (order, n) in [1.0 / 6.0, 5.0 / 6.0].into_iter().zip(n_functions) {
        list.extend((0..n).map(|index| Function { order, index }));
    }
    list
}

/// Γ(λ + 1) of the two orders; Γ(5/6) from Γ(1/6) Γ(5/6) = 2π.
fn gamma_plus_1(order: f64) -> f64 {
    if order < 0.5 { order * GAMMA_1_6 } else { order * 2.0 * PI / GAMMA_1_6 }
}

/// Least Σ (1/height) Y T² of both ladders over all mouths with ∫ h dz = 1.
fn least_energy(
    n_functions: [usize; 2],
    post: Meter,
    mouth: Meter,
    window: &Ladder,
    window_admittance: impl Fn(f64) -> f64,
) -> f64 {
    let families = families(n_functions);
    let gap = Ladder { step: PI, shift: 0.0, height: mouth };
    let mut form = ladder_form(&families, &gap, mouth, |kappa| post_admittance(kappa, post));
    form += ladder_form(&families, window, mouth, window_admittance);
    least(&families, form)
}

/// min cᵀQc under Σ c_j T_j(0) = 1, with T_0(0) = 1 in both families and T_j(0) = 0 else.
fn least(families: &[Function], form: DMatrix<f64>) -> f64 {
    let mean = DVector::from_iterator(
        families.len(),
        families.iter().map(|f| if f.index == 0 { 1.0 } else { 0.0 }),
    );
    let factor = form
        .cholesky()
        .unwrap_or_else(|| panic!("{} functions are not independent in f64", families.len()));
    1.0 / mean.dot(&factor.solve(&mean))
}

/// Y¹ = a I₁(κa)/(κ I₀(κa)) of the gap's cylinder [m²].
fn post_admittance(kappa: f64, post: Meter) -> f64 {
    let b = scaled(kappa * post);
    post * b.i1 / (kappa * b.i0)
}

/// Y² of the window with ∂ψ/∂r = 0 at the wall (ideal iron).
fn wall_admittance(lambda: f64, post: Meter, wall: Meter) -> f64 {
    let (x, y) = (scaled(lambda * post), scaled(lambda * wall));
    let fall = (-2.0 * lambda * (wall - post)).exp();
    post / lambda * (x.i1 * y.k0 * fall + x.k1 * y.i0) / (x.k0 * y.i0 - x.i0 * y.k0 * fall)
}

/// Y² of the window with ψ constant at its outer radius (a flux line).
fn flux_line_admittance(lambda: f64, post: Meter, outer: Meter) -> f64 {
    let (x, y) = (scaled(lambda * post), scaled(lambda * outer));
    let fall = (-2.0 * lambda * (outer - post)).exp();
    post / lambda * (x.k1 * y.i1 - x.i1 * y.k1 * fall) / (x.k0 * y.i1 + x.i0 * y.k1 * fall)
}

/// Σ_m (1/height) Y(λ_m) T_i(ω_m) T_j(ω_m), with the tail.
fn ladder_form(
    families: &[Function],
    ladder: &Ladder,
    mouth: Meter,
    admittance: impl Fn(f64) -> f64,
) -> DMatrix<f64> {
    let n = families.len();
    let n_modes = (OMEGA_MAX / ladder.step).ceil() as usize;
    let mut form = DMatrix::zeros(n, n);
    for m in 1..=n_modes {
        let omega = ladder.step * (m as f64 - ladder.shift);
        let moments = cosine_moments(families, omega);
        let factor = admittance(omega / mouth) / ladder.height;
        for i in 0..n {
            for j in 0..=i {
                form[(i, j)] += factor * moments[i] * moments[j];
            }
        }
    }
    let omega_end = ladder.step * (n_modes as f64 - ladder.shift);
    let level = admittance(omega_end / mouth) * omega_end / ladder.height;
    for i in 0..n {
        for j in 0..=i {
            form[(i, j)] += level * tail(ladder, n_modes, families[i].order, families[j].order);
            form[(j, i)] = form[(i, j)];
        }
    }
    form
}

/// T_j(ω) of every function.
fn cosine_moments(families: &[Function], omega: f64) -> Vec<f64> {
    let mut moments = Vec::with_capacity(families.len());
    let mut from = 0;
    while from < families.len() {
        let order = families[from].order;
        let n = families[from..].iter().take_while(|f| f.order == order).count();
        let gamma = gamma_plus_1(order);
        let bessel = j_orders(order, gamma, 2 * n, omega);
        let front = gamma * (2.0 / omega).powf(order);
        moments.extend(
            (0..n).map(|j| if j % 2 == 0 { front * bessel[2 * j] } else { -front * bessel[2 * j] }),
        );
        from += n;
    }
    moments
}

/// Σ_{m > n_modes} T_i T_j/ω with T ≈ Γ(λ+1) (2/ω)^λ √(2/πω) cos(ω − λπ/2 − π/4).
fn tail(ladder: &Ladder, n_modes: usize, first: f64, second: f64) -> f64 {
    let front = gamma_plus_1(first) * gamma_plus_1(second) * 2f64.powf(first + second) / PI;
    let power = first + second + 2.0;
    let after = |m: f64| ladder.step * (m - ladder.shift);
    let mean_sum = after(n_modes as f64 + 0.5).powf(1.0 - power) / ((power - 1.0) * ladder.step);
    let phase = 0.5 * PI * (first + second) + 0.5 * PI;
    let mean = (0.5 * PI * (first - second)).cos() * mean_sum;
    let omega = after(n_modes as f64 + 1.0);
    let swing = if (ladder.step - PI).abs() < 1e-12 {
        // Every term has the same phase.
        phase.cos() * mean_sum
    } else {
        // Abel: Σ f e^{iθ}, θ growing by 2·step, begins with f e^{iθ}/(1 − e^{2i·step}) = i f e^{i(θ − step)}/(2 sin step).
        -(2.0 * omega - phase - ladder.step).sin() * omega.powf(-power) / (2.0 * ladder.step.sin())
    };
    front * (mean + swing)
}

#[cfg(test)]
mod tests;
