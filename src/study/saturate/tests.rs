//! The study on the reference sections: rows, ends, falls, thread counts.

use super::bench::ends;
use super::*;
use crate::geometry;
use crate::geometry::samples;
use crate::model::{InductanceKind, Law, Requirement};

fn saturating(mut model: Model) -> (Model, Outline) {
    model.materials[0].law = Law::saturation(1500.0, 0.4).unwrap();
    model.accuracy.interval = 5e-3;
    let outline = geometry::outline(&model).unwrap();
    (model, outline)
}

fn table(model: &Model, outline: &Outline, to: f64, n_points: usize) -> Saturation {
    saturate(model, outline, &Wish { to, n_points }, &mut |_, _| {}).unwrap()
}

#[test]
fn rows_rise_stand_on_one_mesh_and_keep_the_wanted_interval() {
    let (model, outline) = saturating(samples::r5());
    let found = table(&model, &outline, 12.0, 14);
    assert_eq!(found.rows.len(), 14);
    assert_eq!((found.rows[0].current, found.rows[13].current), (0.0, 12.0));
    assert!(found.reached);
    for pair in found.rows.windows(2) {
        assert!(pair[0].current < pair[1].current);
        assert!(pair[0].flux_linkage < pair[1].flux_linkage);
        // This law bends one way only.
        assert!(pair[1].incremental < pair[0].incremental);
        assert!(pair[1].incremental < pair[1].apparent);
        assert_eq!(pair[0].n_unknowns, pair[1].n_unknowns);
    }
    for row in &found.rows[1..] {
        let [low, high] = row.flux_linkage_ends.unwrap();
        assert!(low <= row.flux_linkage && row.flux_linkage <= high, "{row:?}");
        // The best width is 2√η = 14 % at 0.5 %.
        assert!(high - low < 0.3 * row.flux_linkage, "{row:?}");
    }
}

#[test]
fn the_falls_lie_where_a_direct_solve_finds_them() {
    let (model, outline) = saturating(samples::r5());
    let found = table(&model, &outline, 12.0, 10);
    let start = found.rows[0].incremental;
    for fall in &found.falls {
        let Some(current) = fall.current else { continue };
        let direct = table(&model, &outline, current, 3);
        let reached = direct.rows[2].incremental / start;
        // Two meshes of 0.5 %.
        assert!((reached - (1.0 - fall.share)).abs() < 5e-3, "{fall:?}: {reached}");
    }
    assert!(found.falls[0].current.is_some());
}

#[test]
fn without_saturation_nothing_falls_and_every_row_has_one_inductance() {
    let mut model = samples::r5();
    model.accuracy.interval = 5e-3;
    let outline = geometry::outline(&model).unwrap();
    let found = table(&model, &outline, 2.0, 4);
    assert!(found.falls.iter().all(|fall| fall.current.is_none()));
    let first = found.rows[0].incremental;
    for row in &found.rows {
        // The algebraic error of λ is 2 % of the interval.
        assert!((row.apparent / first - 1.0).abs() < 0.02 * 5e-3, "{row:?} beside {first}");
    }
}

#[test]
fn where_nothing_bends_the_rows_are_spaced_evenly() {
    let model = samples::r5();
    let outline = geometry::outline(&model).unwrap();
    for interval in [1e-3, 1e-2] {
        let mut model = model.clone();
        model.accuracy.interval = interval;
        let found = table(&model, &outline, 6.0, 24);
        assert_eq!(found.rows.len(), 24);
        let lengths = found.rows.windows(2).map(|pair| pair[1].current - pair[0].current);
        let (short, long) =
            lengths.fold((f64::MAX, 0.0_f64), |(a, b), length| (a.min(length), b.max(length)));
        // Even intervals, some of them halved once more than the others.
        assert!(long <= 2.001 * short, "{short} to {long} A");
    }
}

#[test]
fn all_currents_scale_with_the_first_that_flows_and_no_ends_are_promised() {
    let (mut model, _) = saturating(samples::r5());
    let second = samples::winding("aux", 15.0, [8.2, 13.4], [7.3, 7.9]);
    model.windings.push(second);
    model.windings[0].current = 0.0;
    model.windings[1].current = -2.0;
    let outline = geometry::outline(&model).unwrap();
    let alone = table(&model, &outline, 4.0, 3);
    assert_eq!(alone.winding, "aux");
    assert!(alone.rows[2].flux_linkage > 0.0 && alone.rows[2].flux_linkage_ends.is_some());
    model.windings[0].current = 1.0;
    let outline = geometry::outline(&model).unwrap();
    let both = table(&model, &outline, 4.0, 3);
    assert_eq!(both.winding, model.windings[0].name);
    assert!(both.rows.iter().all(|row| row.flux_linkage_ends.is_none()));
    assert!(both.notes.iter().any(|note| note.contains("several windings")));
}

#[test]
fn a_promise_is_judged_at_its_own_current() {
    let (mut model, _) = saturating(samples::r5());
    let promise = |current, least| Requirement {
        winding: 0,
        current,
        kind: InductanceKind::Apparent,
        least: Some(least),
        most: None,
    };
    model.requirements = vec![promise(2.0, 0.5e-3), promise(2.0, 2e-3), promise(12.0, 0.86e-3)];
    let outline = geometry::outline(&model).unwrap();
    let found = table(&model, &outline, 4.0, 3);
    let verdicts: Vec<_> = found.requirements.iter().map(|r| (r.met, r.is_certain)).collect();
    assert_eq!(verdicts, [(true, true), (false, true), (false, true)]);
}

#[test]
fn no_current_is_refused_in_words() {
    let (mut model, _) = saturating(samples::r5());
    let outline = geometry::outline(&model).unwrap();
    model.windings[0].current = 0.0;
    let error = saturate(&model, &outline, &Wish { to: 1.0, n_points: 3 }, &mut |_, _| {});
    assert_eq!(error.unwrap_err(), StudyError::NoCurrent);
}

#[test]
fn one_thread_and_three_give_the_same_bits() {
    let (model, outline) = saturating(samples::r1());
    let with = |n: usize| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(n).build().unwrap();
        pool.install(|| table(&model, &outline, 8.0, 6))
    };
    assert_eq!(with(1), with(3));
}

#[test]
fn chords_of_a_parabola_hold_its_slope() {
    // W' = I², each end 1 % off.
    let support: Vec<(f64, [f64; 2])> =
        (0..8).map(|k| f64::from(k) * 0.5).map(|i| (i, [0.99 * i * i, 1.01 * i * i])).collect();
    assert_eq!(ends(&support, 0), [0.0; 2]);
    for k in 1..7 {
        let [low, high] = ends(&support, k);
        let slope = 2.0 * support[k].0;
        assert!(low < slope && slope < high, "{low} {slope} {high}");
    }
    assert_eq!(ends(&support, 7)[1], f64::INFINITY);
}
