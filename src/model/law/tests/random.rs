//! Properties that every law keeps, on random tables and saturations with a fixed seed.

use super::*;
use proptest::prelude::*;
use proptest::test_runner::RngSeed;

/// Rows by steps: log-uniform in H over four decades and in permeability over five, one in four at vacuum slope.
fn random_table() -> impl Strategy<Value = (Vec<f64>, Vec<f64>)> {
    let step = (0.0..4.0f64, 0.0..5.0f64, 0..4u8);
    proptest::collection::vec(step, 1..40).prop_map(|steps| {
        let (mut h, mut b) = (vec![0.0], vec![0.0]);
        for (log_step, log_permeability, kind) in steps {
            let step = 10f64.powf(log_step);
            let permeability = if kind == 0 { 1.0 } else { 10f64.powf(log_permeability) };
            h.push(h[h.len() - 1] + step);
            b.push(b[b.len() - 1] + MU0 * permeability * step);
        }
        (h, b)
    })
}

fn interpolations() -> impl Strategy<Value = Interpolation> {
    prop_oneof![Just(Interpolation::Smooth), Just(Interpolation::Linear)]
}

/// The same cases in every run.
fn config() -> ProptestConfig {
    ProptestConfig {
        cases: 256,
        rng_seed: RngSeed::Fixed(0x5eed_b0b1),
        failure_persistence: None,
        ..ProptestConfig::default()
    }
}

/// Samples of a table: in every interval, at the knots, and past the end.
fn samples(h: &[f64]) -> Vec<f64> {
    let mut samples = Vec::new();
    for pair in h.windows(2) {
        samples.extend((1..=8).map(|k| pair[0] + (pair[1] - pair[0]) * k as f64 / 8.0));
    }
    samples.extend([1.5, 10.0, 1e3].map(|factor| factor * h[h.len() - 1]));
    samples
}

proptest! {
    #![proptest_config(config())]

    #[test]
    fn random_tables_round_trip_and_rise((h, b) in random_table(), interpolation in interpolations()) {
        let law = table(&h, &b, interpolation);
        let (mut h_before, mut b_before) = (0.0, 0.0);
        for h in samples(&h) {
            assert_round_trips(&law, h);
            assert!(MU0 * (1.0 - 1e-12) <= law.permeability_differential(h), "dB/dH at {h}");
            let b = law.flux_density(h);
            // The rise is at least µ0 times the step, up to the rounding of B.
            assert!(b_before + MU0 * (h - h_before) <= b * (1.0 + 4.0 * f64::EPSILON), "B falls before {h}");
            (h_before, b_before) = (h, b);
        }
    }

    #[test]
    fn random_tables_are_continuous_at_their_rows((h, b) in random_table(), interpolation in interpolations()) {
        let law = table(&h, &b, interpolation);
        for i in 1..h.len() {
            let (below, at) = (h[i] * (1.0 - f64::EPSILON), h[i]);
            // One unit of H below the row: B may differ by that unit times the slope, and by rounding.
            let most = law.permeability_differential_max();
            let limit = CUBIC_ROUNDING * (law.flux_density(at) + most * at);
            assert!((law.flux_density(below) - law.flux_density(at)).abs() <= limit, "B at row {}", i + 1);
            let energy = law.energy_density(b[i]);
            let jump = energy - law.energy_density(b[i] * (1.0 - f64::EPSILON));
            assert!(jump.abs() <= 2.0 * CUBIC_ROUNDING * at * b[i], "w at row {}", i + 1);
            let jump = law.coenergy_density(at) - law.coenergy_density(below);
            assert!(jump.abs() <= 2.0 * CUBIC_ROUNDING * at * b[i], "w* at row {}", i + 1);
            if interpolation == Interpolation::Smooth && i + 1 < h.len() {
                // Both cubics have the knot's slope; their sums round at the size of the largest slope.
                let (left, right) = (law.permeability_differential(below), law.permeability_differential(at));
                let bend = 12.0 * most * (at - below) / (h[i] - h[i - 1]);
                assert!((left - right).abs() <= 32.0 * f64::EPSILON * most + bend, "slope at row {}", i + 1);
            }
        }
    }

    #[test]
    fn random_tables_have_integrals_for_energies((h, b) in random_table(), interpolation in interpolations()) {
        let law = table(&h, &b, interpolation);
        let (mut energy, mut coenergy, mut crowding) = (0.0, 0.0, 0.0f64);
        for i in 1..h.len() {
            // Polynomials of degree ≤ 3 on each interval: one part of the rule is exact.
            coenergy += gauss(h[i - 1], h[i], 1, |h| law.flux_density(h));
            energy += gauss(h[i - 1], h[i], 1, |h| h * law.permeability_differential(h));
            // The rule's own nodes round by ε·H, which a short interval feels as ε·H/length of itself.
            crowding = crowding.max(h[i] / (h[i] - h[i - 1]));
            let limit = 1e-14 + 4.0 * f64::EPSILON * crowding;
            assert_close(law.coenergy_density(h[i]), coenergy, limit, "w*");
            assert_close(law.energy_density(b[i]), energy, limit, "w");
        }
    }

    #[test]
    fn random_tables_have_legendre_energies(
        (h, b) in random_table(),
        interpolation in interpolations(),
        probes in proptest::collection::vec((0.0..1.5f64, 0.0..1.5f64), 20),
    ) {
        let law = table(&h, &b, interpolation);
        for h in samples(&h) {
            let b = law.flux_density(h);
            assert_legendre(&law, b);
            assert_gap_is_not_negative(&law, b, h);
        }
        let (h_last, b_last) = law.last_point().unwrap();
        for (h_share, b_share) in probes {
            assert_gap_is_not_negative(&law, b_share * b_last, h_share * h_last);
        }
    }

    #[test]
    fn random_saturations_round_trip_with_legendre_energies(
        log_permeability in 0.01..6.0f64,
        polarisation in 0.01..3.0f64,
        log_field in -6.0..8.0f64,
        log_other in -6.0..8.0f64,
    ) {
        let law = Law::saturation(10f64.powf(log_permeability), polarisation).unwrap();
        let h = 10f64.powf(log_field);
        assert_round_trips(&law, h);
        assert_legendre(&law, law.flux_density(h));
        assert_gap_is_not_negative(&law, law.flux_density(h), 10f64.powf(log_other));
        assert!(MU0 <= law.permeability_differential(h));
    }

    #[test]
    fn random_knees_stand_a_brute_force_scan((h, b) in random_table(), interpolation in interpolations()) {
        let law = table(&h, &b, interpolation);
        let level = 0.2 * law.permeability_differential_max();
        match law.knee() {
            None => prop_assert!(level <= MU0),
            Some(knee) => {
                let field = law.field(knee);
                // Beyond the knee (a hair for rounding) everything is below the level; just before it, not.
                for h in samples(&h).into_iter().filter(|&h| field * (1.0 + 1e-9) < h) {
                    prop_assert!(law.permeability_differential(h) < level * (1.0 + 1e-12));
                }
                prop_assert!(level * (1.0 - 1e-6) <= law.permeability_differential(field * (1.0 - 1e-12)));
            }
        }
    }
}
