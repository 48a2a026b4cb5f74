//! A checked B–H table: columns → pieces, straight or monotone cubic, then straight with slope µ0 for ever.

use super::LawError;
use super::piece::Piece;
use crate::units::{AmperePerMeter, JoulePerCubicMeter, MU0, Tesla};

/// How a table is joined.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Interpolation {
    /// Monotone cubic of the polarisation over H.
    Smooth,
    /// Straight lines in (H, B).
    Linear,
}

/// A checked B–H table, ready to evaluate.
///
/// `Smooth`: monotone cubic Hermite interpolation of the polarisation J_p = B − µ0 H over H, so dB/dH ≥ µ0.
/// `Linear`: straight lines in (H, B). Past the last row the slope is µ0 (fully saturated).
#[derive(Debug, Clone, PartialEq)]
pub struct BhTable {
    /// One piece a row; the last is the endless one.
    pieces: Vec<Piece>,
    interpolation: Interpolation,
}

/// Largest H [A/m] of a row; far beyond any material, keeps the energies finite.
const FIELD_MAX: AmperePerMeter = 1e12;
/// Largest B [T] of a row, for the same reason.
pub(super) const FLUX_DENSITY_MAX: Tesla = 1e7;
/// Largest relative permeability between two rows; 1000 × above the softest alloys (about 1e6, from memory).
const PERMEABILITY_MAX: f64 = 1e9;
/// How far below µ0 (relative) a slope may be and still pass for rounding of the input; it is then raised to µ0.
///
/// 1e-6 covers µ0 = 4π·1e-7 (1.4e-10 off) and rows printed with 8 digits of B.
const SLOPE_ROUNDING: f64 = 1e-6;
/// Slope at a knot over the smaller neighbouring secant: up to 3 the cubic is monotone.
///
/// A hair below 3, so that rounding cannot push dJ_p/dH below 0 where it touches 0.
const SLOPE_RATIO_MAX: f64 = 3.0 - 1e-6;

impl BhTable {
    /// Checks two columns of equal length and joins them.
    ///
    /// - `h`: field [A/m], strictly rising from 0
    /// - `b`: flux density [T], strictly rising from 0, each step at least µ0 times the step of `h`
    ///
    /// A step below that by at most 1e-6 of itself is rounding of the input and is raised. Each error names the row.
    pub fn new(
        h: Vec<AmperePerMeter>,
        b: Vec<Tesla>,
        interpolation: Interpolation,
    ) -> Result<BhTable, LawError> {
        check(&h, &b)?;
        let b = raised(&h, &b);
        let secants: Vec<f64> =
            (1..h.len()).map(|i| ((b[i] - b[i - 1]) / (h[i] - h[i - 1]) - MU0).max(0.0)).collect();
        let knot_slopes = match interpolation {
            Interpolation::Smooth => monotone_slopes(&h, &secants),
            Interpolation::Linear => Vec::new(),
        };
        let coefficients = |i: usize| match interpolation {
            Interpolation::Smooth => {
                hermite(h[i + 1] - h[i], secants[i], knot_slopes[i], knot_slopes[i + 1])
            }
            Interpolation::Linear => [MU0 + secants[i], 0.0, 0.0],
        };
        Ok(BhTable { pieces: chain(&h, &b, coefficients), interpolation })
    }

    /// How the rows are joined.
    pub fn interpolation(&self) -> Interpolation {
        self.interpolation
    }

    /// The rows (H [A/m], B [T]), from (0, 0) up.
    pub fn rows(&self) -> impl ExactSizeIterator<Item = (AmperePerMeter, Tesla)> + '_ {
        self.pieces.iter().map(|piece| (piece.h, piece.b))
    }

    pub(super) fn last_point(&self) -> (AmperePerMeter, Tesla) {
        let last = &self.pieces[self.pieces.len() - 1];
        (last.h, last.b)
    }

    /// The piece that holds B, and the way into it.
    fn at_flux_density(&self, b: Tesla) -> (&Piece, AmperePerMeter) {
        let index = self.pieces.partition_point(|piece| piece.b <= b).saturating_sub(1);
        let piece = &self.pieces[index];
        (piece, piece.step_for(b - piece.b))
    }

    /// The piece that holds H, and the way into it.
    fn at_field(&self, h: AmperePerMeter) -> (&Piece, AmperePerMeter) {
        let index = self.pieces.partition_point(|piece| piece.h <= h).saturating_sub(1);
        let piece = &self.pieces[index];
        (piece, h - piece.h)
    }

    pub(super) fn field(&self, b: Tesla) -> AmperePerMeter {
        let (piece, s) = self.at_flux_density(b);
        piece.h + s
    }

    /// H(B) and dB/dH there.
    pub(super) fn field_and_slope(&self, b: Tesla) -> (AmperePerMeter, f64) {
        let (piece, s) = self.at_flux_density(b);
        (piece.h + s, piece.slope(s))
    }

    /// H(B), dB/dH and w(B), with one inversion.
    pub(super) fn field_slope_and_energy(
        &self,
        b: Tesla,
    ) -> (AmperePerMeter, f64, JoulePerCubicMeter) {
        let (piece, s) = self.at_flux_density(b);
        (piece.h + s, piece.slope(s), piece.energy + piece.energy_rise(s))
    }

    pub(super) fn flux_density(&self, h: AmperePerMeter) -> Tesla {
        let (piece, s) = self.at_field(h);
        piece.b + piece.rise(s)
    }

    pub(super) fn slope(&self, h: AmperePerMeter) -> f64 {
        let (piece, s) = self.at_field(h);
        piece.slope(s)
    }

    pub(super) fn energy_density(&self, b: Tesla) -> JoulePerCubicMeter {
        let (piece, s) = self.at_flux_density(b);
        piece.energy + piece.energy_rise(s)
    }

    pub(super) fn coenergy_density(&self, h: AmperePerMeter) -> JoulePerCubicMeter {
        let (piece, s) = self.at_field(h);
        piece.coenergy + piece.coenergy_rise(s)
    }

    pub(super) fn slope_max(&self) -> f64 {
        self.bounded_pieces().iter().map(Piece::slope_max).fold(MU0, f64::max)
    }

    /// The largest B [T] with dB/dH ≥ `level` [H/m]; None where that is everywhere (level ≤ µ0) or nowhere.
    pub(super) fn last_above(&self, level: f64) -> Option<Tesla> {
        if level <= MU0 {
            return None;
        }
        let mut backwards = self.pieces.windows(2).rev();
        let found = backwards.find_map(|pair| Some((pair, pair[0].last_above(level)?)));
        // At a row the row's own B counts: the sum of the cubic may miss it by a rounding.
        found.map(
            |(pair, s)| if s == pair[0].length { pair[1].b } else { pair[0].b + pair[0].rise(s) },
        )
    }

    /// All pieces but the endless one.
    fn bounded_pieces(&self) -> &[Piece] {
        &self.pieces[..self.pieces.len() - 1]
    }

    /// Newton steps of the inverse at B, for the test of its cost.
    #[cfg(test)]
    pub(super) fn n_inverse_steps(&self, b: Tesla) -> usize {
        let index = self.pieces.partition_point(|piece| piece.b <= b).saturating_sub(1);
        self.pieces[index].step_and_count(b - self.pieces[index].b).1
    }
}

/// Everything that makes columns a B–H curve; the first bad row is reported.
fn check(h: &[AmperePerMeter], b: &[Tesla]) -> Result<(), LawError> {
    if h.len() != b.len() {
        return Err(LawError::ColumnLengths { n_h: h.len(), n_b: b.len() });
    }
    if h.len() < 2 {
        return Err(LawError::TooFewRows { n_rows: h.len() });
    }
    for i in 0..h.len() {
        // NaN fails both comparisons.
        if !(h[i].abs() <= FIELD_MAX && b[i].abs() <= FLUX_DENSITY_MAX) {
            return Err(LawError::OutOfRange { row: i + 1, h: h[i], b: b[i] });
        }
        if i == 0 {
            if h[0] != 0.0 || b[0] != 0.0 {
                return Err(LawError::FirstRowNotZero { h: h[0], b: b[0] });
            }
        } else {
            check_step(i + 1, [h[i - 1], h[i]], [b[i - 1], b[i]])?;
        }
    }
    Ok(())
}

/// One step of the table, from the row before to `row`.
fn check_step(row: usize, h: [AmperePerMeter; 2], b: [Tesla; 2]) -> Result<(), LawError> {
    let (step, rise) = (h[1] - h[0], b[1] - b[0]);
    if step <= 0.0 {
        return Err(LawError::FieldNotIncreasing { row, h_before: h[0], h: h[1] });
    }
    if rise <= 0.0 {
        return Err(LawError::FluxDensityNotIncreasing { row, b_before: b[0], b: b[1] });
    }
    let vacuum_rise = MU0 * step;
    if rise < vacuum_rise * (1.0 - SLOPE_ROUNDING) {
        return Err(LawError::SlopeBelowVacuum { row, step, rise, vacuum_rise });
    }
    if PERMEABILITY_MAX * vacuum_rise < rise {
        let permeability = rise / vacuum_rise;
        return Err(LawError::SlopeTooSteep { row, step, rise, permeability });
    }
    Ok(())
}

/// The flux densities with steps that rounding left below µ0 raised to µ0.
fn raised(h: &[AmperePerMeter], b: &[Tesla]) -> Vec<Tesla> {
    let mut raised = vec![0.0; b.len()];
    for i in 1..b.len() {
        raised[i] = b[i].max(raised[i - 1] + MU0 * (h[i] - h[i - 1]));
    }
    raised
}

/// dJ_p/dH at the knots: three-point parabolas, limited so that the cubics are monotone.
///
/// In the box 0 ≤ slope ≤ 3·secant on both sides a cubic Hermite piece is monotone (Fritsch & Carlson 1980,
/// SIAM J. Numer. Anal. 17, 238; the box is de Boor & Swartz 1977, from memory). Limiting knot by knot does not
/// depend on the order. At H = 0 the parabola is the Rayleigh law J_p = aH + cH² (Rayleigh 1887, from memory).
fn monotone_slopes(h: &[AmperePerMeter], secants: &[f64]) -> Vec<f64> {
    let n = secants.len();
    let length = |i: usize| h[i + 1] - h[i];
    if n == 1 {
        return vec![secants[0]; 2];
    }
    let one_sided = |near: usize, far: usize| {
        let bend = (secants[near] - secants[far]) * (length(near) / (length(near) + length(far)));
        secants[near] + bend
    };
    let mut slopes = vec![0.0; n + 1];
    // Not below half the secant: an initial permeability of 1 would be an artefact of the parabola.
    slopes[0] = one_sided(0, 1).clamp(0.5 * secants[0], SLOPE_RATIO_MAX * secants[0]);
    slopes[n] = one_sided(n - 1, n - 2).clamp(0.0, SLOPE_RATIO_MAX * secants[n - 1]);
    for i in 1..n {
        let (left, right) = (length(i - 1), length(i));
        let parabola = (left * secants[i] + right * secants[i - 1]) / (left + right);
        slopes[i] = parabola.min(SLOPE_RATIO_MAX * secants[i - 1].min(secants[i]));
    }
    slopes
}

/// c₁, c₂, c₃ of B on a piece from secant and end slopes of J_p.
fn hermite(length: AmperePerMeter, secant: f64, start: f64, end: f64) -> [f64; 3] {
    let c2 = (3.0 * secant - 2.0 * start - end) / length;
    let c3 = (start + end - 2.0 * secant) / (length * length);
    [MU0 + start, c2, c3]
}

/// The pieces with their energies, and the endless one of slope µ0.
fn chain(
    h: &[AmperePerMeter],
    b: &[Tesla],
    coefficients: impl Fn(usize) -> [f64; 3],
) -> Vec<Piece> {
    let (mut coenergy, mut energy) = (CompensatedSum::default(), CompensatedSum::default());
    let mut pieces = Vec::with_capacity(h.len());
    for i in 0..h.len() {
        let last = i + 1 == h.len();
        let piece = Piece {
            // A written "-0" starts the table as 0.
            h: h[i] + 0.0,
            b: b[i],
            coenergy: coenergy.value(),
            energy: energy.value(),
            length: if last { f64::INFINITY } else { h[i + 1] - h[i] },
            coefficients: if last { [MU0, 0.0, 0.0] } else { coefficients(i) },
        };
        if !last {
            coenergy.add(piece.coenergy_rise(piece.length));
            energy.add(piece.energy_rise(piece.length));
        }
        pieces.push(piece);
    }
    pieces
}

/// Sum of positive terms with the rounding errors carried along (Kahan 1965, Neumaier's form 1974, from memory).
///
/// Keeps w + w* = h·b at the knots to a few units of the last place however long the table is.
#[derive(Default)]
struct CompensatedSum {
    sum: f64,
    lost: f64,
}

impl CompensatedSum {
    fn add(&mut self, term: f64) {
        let sum = self.sum + term;
        self.lost +=
            if self.sum < term { (term - sum) + self.sum } else { (self.sum - sum) + term };
        self.sum = sum;
    }

    fn value(&self) -> f64 {
        self.sum + self.lost
    }
}
