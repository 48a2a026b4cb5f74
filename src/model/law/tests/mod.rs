//! The laws against each other, against quadrature, and against a published steel curve.

mod random;

use super::*;

/// Steel of TEAM workshop problem 13 up to 1.8 T: T. Nakata, N. Takahashi, K. Fujiwara et al., problem definition.
const STEEL_H: [f64; 27] = [
    0.0, 16.0, 30.0, 54.0, 93.0, 143.0, 191.0, 210.0, 222.0, 233.0, 247.0, 258.0, 272.0, 289.0,
    313.0, 342.0, 377.0, 433.0, 509.0, 648.0, 933.0, 1228.0, 1934.0, 2913.0, 4993.0, 7189.0,
    9423.0,
];
const STEEL_B: [f64; 27] = [
    0.0, 0.0025, 0.005, 0.0125, 0.025, 0.05, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0, 1.1,
    1.2, 1.3, 1.4, 1.5, 1.55, 1.6, 1.65, 1.7, 1.75, 1.8,
];

fn table(h: &[f64], b: &[f64], interpolation: Interpolation) -> Law {
    Law::Table(BhTable::new(h.to_vec(), b.to_vec(), interpolation).unwrap())
}

fn steel(interpolation: Interpolation) -> Law {
    table(&STEEL_H, &STEEL_B, interpolation)
}

/// One law of each kind, for the properties that all share.
fn examples() -> Vec<Law> {
    vec![
        Law::constant(2000.0).unwrap(),
        Law::constant(1.0).unwrap(),
        steel(Interpolation::Smooth),
        steel(Interpolation::Linear),
        Law::saturation(2000.0, 0.45).unwrap(),
        Law::saturation(1e5, 2.0).unwrap(),
        Law::saturation(1.5, 1.0).unwrap(),
    ]
}

/// Fields from far below the first row of any table to far beyond the last.
fn fields() -> impl Iterator<Item = f64> {
    (-60..=140).map(|k| 10f64.powf(k as f64 / 20.0))
}

#[track_caller]
fn assert_close(found: f64, wanted: f64, relative: f64, what: &str) {
    let limit = relative * wanted.abs();
    assert!(
        (found - wanted).abs() <= limit,
        "{what}: {found:e} against {wanted:e}, limit {relative:e}"
    );
}

/// Roundings of a cubic's sum, in units of its last place: its terms are up to 13 times as large as the sum.
const CUBIC_ROUNDING: f64 = 16.0 * f64::EPSILON;

/// Tolerance of a round trip: the rounding of the argument between is stretched by the law.
fn round_trip_limit(elasticity: f64) -> f64 {
    CUBIC_ROUNDING * (1.0 + elasticity)
}

#[track_caller]
fn assert_round_trips(law: &Law, h: f64) {
    let b = law.flux_density(h);
    let slope = law.permeability_differential(h);
    // Near a corner of the law either tangent may be the one that counts: take the worse of both sides.
    let before = law.permeability_differential(h * (1.0 - 1e-12));
    let (least, most) = (slope.min(before), slope.max(before));
    let wanted = round_trip_limit(b / (h * least));
    assert_close(law.field(b), h, wanted, &format!("H(B(H)) at H = {h}"));
    let again = law.flux_density(law.field(b));
    assert_close(again, b, round_trip_limit(most * h / b), &format!("B(H(B)) at B = {b}"));
}

/// w + w* = H·B on the curve; a few units of the last place for the four sums.
#[track_caller]
fn assert_legendre(law: &Law, b: f64) {
    let h = law.field(b);
    let sum = law.energy_density(b) + law.coenergy_density(h);
    assert_close(sum, h * b, 16.0 * f64::EPSILON, &format!("w + w* at B = {b}"));
}

/// Least allowed w(b) + w*(h) − b·h over w + w* + b·h.
///
/// The exact gap is ≥ 0 and vanishes on the curve, so what is below 0 is the rounding of the three terms.
const GAP_ROUNDING: f64 = 1e-14;

#[track_caller]
fn assert_gap_is_not_negative(law: &Law, b: f64, h: f64) {
    let (energy, coenergy) = (law.energy_density(b), law.coenergy_density(h));
    let gap = energy + coenergy - b * h;
    let scale = energy + coenergy + b * h;
    assert!(-GAP_ROUNDING * scale <= gap, "gap {gap:e} of {scale:e} at b = {b:e}, h = {h:e}");
}

/// Integral by the three-point Gauss rule on `n` equal parts (exact to degree 5).
fn gauss(from: f64, to: f64, n: usize, f: impl Fn(f64) -> f64) -> f64 {
    let half = 0.5 * (to - from) / n as f64;
    let node = 0.6f64.sqrt();
    (0..n)
        .map(|i| {
            let middle = from + half * (2 * i + 1) as f64;
            let ends = f(middle - half * node) + f(middle + half * node);
            half * (5.0 * ends + 8.0 * f(middle)) / 9.0
        })
        .sum()
}

#[test]
fn published_steel_gives_the_fields_of_a_long_solenoid() {
    // Core of radius 10 mm in a thin solenoid of radius 12 mm: H = nI inside, so flux and energies per metre are sums.
    // Values: independent calculation from the same table, straight lines, 13 digits; 1e-9 covers another µ0 (1.4e-10).
    let rows = [
        [
            200.0,
            0.1473684210526316,
            4.633189590249933e-05,
            0.006874695280213529,
            0.0023916839002863354,
        ],
        [
            400.0,
            1.1410714285714285,
            0.0003585476437371047,
            0.09286916506698685,
            0.050549892427855035,
        ],
        [8000.0, 1.7681512981199643, 0.0005568707531605671, 0.44488242271540207, 4.010083602569134],
    ];
    let law = steel(Interpolation::Linear);
    let core = std::f64::consts::PI * 0.010f64.powi(2);
    let air = std::f64::consts::PI * 0.012f64.powi(2) - core;
    for [h, b, flux, energy, coenergy] in rows {
        let air_energy = air * 0.5 * MU0 * h * h;
        assert_close(law.flux_density(h), b, 1e-14, "B");
        assert_close(core * law.flux_density(h) + air * MU0 * h, flux, 1e-9, "flux");
        assert_close(core * law.energy_density(b) + air_energy, energy, 1e-9, "energy");
        assert_close(core * law.coenergy_density(h) + air_energy, coenergy, 1e-9, "coenergy");
    }
}

#[test]
fn smooth_steel_passes_through_its_rows_and_rises_to_the_vacuum_line() {
    let law = steel(Interpolation::Smooth);
    for (h, b) in STEEL_H.into_iter().zip(STEEL_B) {
        assert_eq!(law.flux_density(h), b);
        assert_close(law.field(b), h, 1e-15, "H at a row");
    }
    assert_eq!(law.last_point(), Some((9423.0, 1.8)));
    assert_close(law.flux_density(19423.0), 1.8 + MU0 * 1e4, 1e-15, "B past the last row");
    assert_eq!(law.permeability_differential(9423.0), MU0);
    // Three-point parabola through 0, 16 and 30 A/m by hand: (46·0.0025/16 − 16·0.0025/14)/30.
    let slope = (46.0 * 0.0025 / 16.0 - 16.0 * 0.0025 / 14.0) / 30.0;
    assert_close(law.initial_permeability(), slope / MU0, 1e-14, "initial permeability");
}

#[test]
fn smooth_table_reproduces_a_rayleigh_curve_away_from_its_end() {
    // B = aH + cH² is its own three-point parabola, so every cubic must fall on it.
    let curve = |h: f64| 1e-3 * h + 2e-5 * h * h;
    let h: Vec<f64> = [0.0, 3.0, 10.0, 22.0, 30.0, 45.0].to_vec();
    let b: Vec<f64> = h.iter().map(|&h| curve(h)).collect();
    let law = table(&h, &b, Interpolation::Smooth);
    for k in 1..450 {
        let h = 0.1 * k as f64;
        assert_close(law.flux_density(h), curve(h), 1e-14, "B");
    }
}

#[test]
fn every_law_round_trips() {
    for law in examples() {
        for h in fields() {
            assert_round_trips(&law, h);
        }
        assert_eq!((law.field(0.0), law.flux_density(0.0)), (0.0, 0.0));
    }
    let steel = steel(Interpolation::Smooth);
    for k in 1..=4000 {
        // The stated accuracy of the inverse for a real material.
        let b = 5e-4 * k as f64;
        let h = steel.field(b);
        assert_close(steel.flux_density(h), b, 1e-13, "steel, B");
        assert_close(steel.field(steel.flux_density(h)), h, 1e-13, "steel, H");
    }
}

#[test]
fn every_law_has_legendre_energies() {
    for law in examples() {
        for h in fields() {
            let b = law.flux_density(h);
            assert_legendre(&law, b);
            for other in fields().step_by(7) {
                assert_gap_is_not_negative(&law, b, other);
            }
            for nudge in [-1e-3, -1e-6, -1e-9, 0.0, 1e-9, 1e-6, 1e-3] {
                assert_gap_is_not_negative(&law, b, h * (1.0 + nudge));
            }
        }
        assert_eq!((law.energy_density(0.0), law.coenergy_density(0.0)), (0.0, 0.0));
    }
}

#[test]
fn saturation_energies_are_integrals_and_small_fields_keep_their_digits() {
    for (permeability, polarisation) in [(2000.0, 0.45), (1e5, 2.0), (1.5, 1.0)] {
        let law = Law::saturation(permeability, polarisation).unwrap();
        let half_field = polarisation / (MU0 * (permeability - 1.0));
        for x in [0.1, 0.499_999, 0.500_001, 2.0] {
            let h = x * half_field;
            let coenergy = gauss(0.0, h, 200, |h| law.flux_density(h));
            // 200 parts of a smooth integrand: the rule is exact to rounding.
            assert_close(law.coenergy_density(h), coenergy, 1e-13, "w*");
            let energy = gauss(0.0, law.flux_density(h), 400, |b| law.field(b));
            assert_close(law.energy_density(law.flux_density(h)), energy, 1e-12, "w");
        }
        // At x = 1e-9 the law is µ0µ_i H to 1e-9, so w* = ½µ0µ_i H²(1 − O(x)); a cancelling form would be off by 1.
        let h = 1e-9 * half_field;
        assert_close(law.coenergy_density(h), 0.5 * MU0 * permeability * h * h, 2e-9, "small w*");
        assert_close(
            law.energy_density(law.flux_density(h)),
            0.5 * MU0 * permeability * h * h,
            3e-9,
            "small w",
        );
    }
}

#[test]
fn reluctivity_is_chord_and_tangent() {
    for law in examples() {
        let limit = 1.0 / (MU0 * law.initial_permeability());
        assert_close(law.reluctivity(0.0).0, limit, 1e-15, "ν at 0");
        assert_close(law.reluctivity(1e-310).0, limit, 1e-15, "ν at a subnormal B");
        // A table of steel bends at once, but not below 1e-12 T.
        assert_close(law.reluctivity(1e-12).0, limit, 1e-6, "ν near 0");
        for h in fields() {
            let b = law.flux_density(h);
            let (chord, tangent) = law.reluctivity(b);
            assert_close(chord, law.field(b) / b, 1e-15, "H/B");
            assert_close(
                tangent,
                1.0 / law.permeability_differential(law.field(b)),
                1e-15,
                "dH/dB",
            );
        }
    }
}

#[test]
fn tangent_is_the_derivative() {
    for law in examples().into_iter().filter(|law| *law != steel(Interpolation::Linear)) {
        for h in fields().filter(|h| (1e-1..9e3).contains(h)) {
            // Central difference at 1e-5 of H: error 1e-10·H²B'''/6, up to 1e-5 where the steel bends most,
            // one-sided second derivative at a knot included.
            let step = 1e-5 * h;
            let quotient = (law.flux_density(h + step) - law.flux_density(h - step)) / (2.0 * step);
            assert_close(
                law.permeability_differential(h),
                quotient,
                2e-4,
                &format!("dB/dH at {h}"),
            );
        }
    }
}

#[test]
fn huge_saturation_and_straight_tables_are_constant_laws() {
    let constant = Law::constant(800.0).unwrap();
    let huge = Law::saturation(800.0, 1e7).unwrap();
    let h = [0.0, 10.0, 35.0, 200.0];
    let b = h.map(|h| constant.flux_density(h));
    for (law, limit) in [
        // B/J_s = 2e-8 is the first term of the difference.
        (huge, 1e-7),
        (table(&h, &b, Interpolation::Smooth), 1e-14),
        (table(&h, &b, Interpolation::Linear), 1e-14),
    ] {
        for h in [1e-9, 0.3, 10.0, 70.0, 199.0] {
            let b = constant.flux_density(h);
            assert_close(law.flux_density(h), b, limit, "B");
            assert_close(law.field(b), h, limit, "H");
            assert_close(law.energy_density(b), constant.energy_density(b), limit, "w");
            assert_close(law.coenergy_density(h), constant.coenergy_density(h), limit, "w*");
            assert_close(law.reluctivity(b).0, constant.reluctivity(b).0, limit, "ν");
            assert_close(law.reluctivity(b).1, constant.reluctivity(b).1, 4.0 * limit, "dH/dB");
        }
    }
}

/// The knee by brute force: the last of many fields whose dB/dH is still 20 % of the largest seen.
fn scanned_knee(law: &Law, h_max: f64, n: usize) -> (f64, f64) {
    let slope = |k: usize| law.permeability_differential(h_max * k as f64 / n as f64);
    let most = (0..=n).map(slope).fold(0.0, f64::max);
    let last = (0..=n).rev().find(|&k| 0.2 * most <= slope(k)).unwrap();
    let at = |k: usize| law.flux_density(h_max * k as f64 / n as f64);
    (at(last), at(last + 1))
}

#[test]
fn knee_is_where_the_slope_has_fallen_to_a_fifth() {
    assert_eq!(Law::constant(2000.0).unwrap().knee(), None);
    // Closed form: (1 + x)² = (µ_i − 1)/(0.2 µ_i − 1).
    let law = Law::saturation(2000.0, 0.45).unwrap();
    let x = (1999.0f64 / 399.0).sqrt() - 1.0;
    let h = x * 0.45 / (MU0 * 1999.0);
    assert_close(law.knee().unwrap(), law.flux_density(h), 1e-14, "saturation");
    assert_close(law.permeability_differential(h), 0.2 * 2000.0 * MU0, 1e-14, "its slope");
    // A law that starts below 5 µ0 never falls to a fifth: µ0 stays.
    assert_eq!(Law::saturation(4.9, 1.0).unwrap().knee(), None);
    // Straight lines: the largest slope is 0.1 T/11 A/m; the last step above a fifth of it ends at 1.1 T.
    assert_close(steel(Interpolation::Linear).knee().unwrap(), 1.1, 1e-15, "linear");
    let smooth = steel(Interpolation::Smooth);
    let (low, high) = scanned_knee(&smooth, 9423.0, 2_000_000);
    let knee = smooth.knee().unwrap();
    // The scan knows the largest slope only to its step: 1e-6 T of play.
    assert!(low - 1e-6 <= knee && knee <= high + 1e-6, "{knee} outside [{low}, {high}]");
}

#[test]
fn inverse_of_a_smooth_table_takes_few_steps() {
    let table = BhTable::new(STEEL_H.to_vec(), STEEL_B.to_vec(), Interpolation::Smooth).unwrap();
    let steps: Vec<usize> = (1..18_000).map(|k| table.n_inverse_steps(1e-4 * k as f64)).collect();
    let most = steps.iter().max().copied().unwrap();
    let mean = steps.iter().sum::<usize>() as f64 / steps.len() as f64;
    assert!(mean <= 3.5 && most <= 8, "mean {mean:.2}, most {most}");
}

/// Steep, flat, steep: the limiter holds both ends of the middle cubic, whose slope nearly falls to µ0 half-way.
const STEPPED_H: [f64; 4] = [0.0, 0.01, 66.81, 66.82];
const STEPPED_B: [f64; 4] = [0.0, 0.0015, 0.2056, 0.2088];

#[test]
fn inverse_of_a_flat_cubic_stays_inside_its_bracket() {
    // Newton's method alone leaves the interval near the flat middle and needs up to 16 steps to come back.
    let table =
        BhTable::new(STEPPED_H.to_vec(), STEPPED_B.to_vec(), Interpolation::Smooth).unwrap();
    let law = Law::Table(table.clone());
    for k in 1..20_000 {
        let h = k as f64 / 300.0;
        assert_round_trips(&law, h);
        let n_steps = table.n_inverse_steps(law.flux_density(h));
        assert!(n_steps <= 12, "{n_steps} steps at H = {h}");
    }
}

#[test]
fn slow_start_keeps_an_initial_permeability_of_half_the_first_secant() {
    // The parabola through the three points starts downwards: ((2·100 + 20)·1e-3 − 100·2e-2)/120 < 0.
    let law = table(&[0.0, 100.0, 120.0], &[0.0, 0.1, 0.5], Interpolation::Smooth);
    let floor = MU0 + 0.5 * (1e-3 - MU0);
    assert_close(law.initial_permeability(), floor / MU0, 1e-14, "µ_i");
}

#[test]
fn long_tables_keep_the_legendre_pair_to_the_last_place() {
    // A plain sum of 100 000 terms would be off by some hundred units of the last place.
    let source = Law::saturation(2000.0, 0.45).unwrap();
    let h: Vec<f64> = (0..100_001).map(|k| 0.03 * k as f64).collect();
    let b: Vec<f64> = h.iter().map(|&h| source.flux_density(h)).collect();
    let law = table(&h, &b, Interpolation::Linear);
    for k in (1000..100_000).step_by(997) {
        assert_legendre(&law, b[k]);
    }
}

#[track_caller]
fn refused(h: &[f64], b: &[f64]) -> (Option<usize>, String) {
    let error = BhTable::new(h.to_vec(), b.to_vec(), Interpolation::Smooth).unwrap_err();
    (error.row(), error.to_string())
}

#[test]
fn refuses_bad_rows_by_number_and_says_why() {
    for (h, b, row, words) in [
        (vec![0.0, 1.0], vec![0.0], None, "2 values of H, 1 of B"),
        (vec![0.0], vec![0.0], None, "at least 2 rows, this one has 1"),
        (vec![], vec![], None, "this one has 0"),
        (vec![1.0, 2.0], vec![0.0, 0.1], Some(1), "the first row must be 0,0"),
        (vec![0.0, f64::NAN], vec![0.0, 0.1], Some(2), "H = NaN A/m"),
        (vec![0.0, 1.0], vec![0.0, f64::INFINITY], Some(2), "B = inf T"),
        (vec![0.0, 1e300], vec![0.0, 1e299], Some(2), "up to 1e12 A/m"),
        (
            vec![0.0, 5.0, 5.0],
            vec![0.0, 0.1, 0.2],
            Some(3),
            "H = 5 A/m does not rise above the 5 A/m",
        ),
        (vec![0.0, -5.0], vec![0.0, 0.1], Some(2), "does not rise above the 0 A/m"),
        (
            vec![0.0, 5.0, 6.0],
            vec![0.0, 0.2, 0.1],
            Some(3),
            "B = 0.1 T does not rise above the 0.2 T",
        ),
        (vec![0.0, 5.0, 1e5], vec![0.0, 0.1, 0.2], Some(3), "slope µ0"),
        (vec![0.0, 1e-9], vec![0.0, 1.0], Some(2), "1e9 is the most"),
    ] {
        let (found, message) = refused(&h, &b);
        assert_eq!(found, row, "{message}");
        assert!(message.contains(words), "{message:?} lacks {words:?}");
    }
}

#[test]
fn refuses_bad_parameters_with_their_numbers() {
    for value in [0.0, -1.0, f64::NAN, f64::INFINITY] {
        assert!(
            Law::constant(value)
                .unwrap_err()
                .to_string()
                .contains(&format!("permeability = {value}"))
        );
        let message = Law::saturation(2000.0, value).unwrap_err().to_string();
        assert!(message.contains(&format!("flux_density = {value} T")), "{message}");
    }
    let message = Law::saturation(1.0, 0.4).unwrap_err().to_string();
    assert!(message.contains("initial_permeability = 1: needs a finite number > 1"), "{message}");
}

#[test]
fn slope_a_rounding_below_vacuum_is_raised_and_more_is_refused() {
    let h = [0.0, 100.0, 1e5, 3e5];
    let b = |short: f64| [0.0, 0.5, 0.5 + MU0 * 99_900.0 * (1.0 - short), 0.5 + MU0 * 299_900.0];
    for interpolation in [Interpolation::Smooth, Interpolation::Linear] {
        let law = table(&h, &b(0.9e-6), interpolation);
        assert!(MU0 <= law.permeability_differential(5e4));
        assert_close(law.flux_density(1e5), 0.5 + MU0 * 99_900.0, 1e-15, "raised row");
    }
    assert_eq!(refused(&h, &b(1.1e-6)).0, Some(3));
}
