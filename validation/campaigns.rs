//! Random cases in numbers: the exact value must lie in the interval every time.
//!
//! `RUN_SLOW_TESTS=1` runs them in full; otherwise a tenth of each.

use crate::builders::{self, Chords};
use crate::coils::{mutual_inductance, self_inductance};
use crate::dice::Dice;
use crate::modes::{self, gapped_pot};
use crate::random::{air_coil, coil_pair, gapped_pot_case, sphere_coil};
use crate::solver::solve;
use crate::sphere;
use gapwright::units::MU0;
use rayon::prelude::*;

/// What came of one case.
#[derive(Debug, Clone)]
pub struct Finding {
    /// Interval over true error, where one solution stands against the exact value of the same problem.
    pub efficiency: Option<f64>,
    /// Why it failed, with the case; `None` when all is well.
    pub failure: Option<String>,
}

/// What came of all cases.
#[derive(Debug, Clone)]
pub struct Summary {
    pub n_cases: usize,
    pub failures: Vec<String>,
    /// Least, median and largest interval over true error, where it was judged.
    pub efficiency: Option<[f64; 3]>,
}

/// Runs `n_cases` in parallel, each from its own seed.
pub fn run(n_cases: usize, seed: u64, case: impl Fn(&mut Dice) -> Finding + Sync) -> Summary {
    let one = |i: usize| case(&mut Dice(seed + i as u64));
    let findings: Vec<Finding> = (0..n_cases).into_par_iter().map(one).collect();
    let numbered = findings.iter().enumerate();
    let failures = numbered.filter_map(|(i, f)| {
        f.failure.as_ref().map(|text| format!("seed {}: {text}", seed + i as u64))
    });
    let mut ratios: Vec<f64> = findings.iter().filter_map(|f| f.efficiency).collect();
    ratios.sort_by(f64::total_cmp);
    let n = ratios.len();
    let efficiency = (n > 0).then(|| [ratios[0], ratios[n / 2], ratios[n - 1]]);
    Summary { n_cases, failures: failures.collect(), efficiency }
}

/// Number of cases of a campaign: all of them, or a tenth.
fn share_of(n_full: usize) -> usize {
    if std::env::var_os("RUN_SLOW_TESTS").is_some_and(|v| v == "1") { n_full } else { n_full / 10 }
}

/// A random air coil against the quadrature.
pub fn one_air_coil(dice: &mut Dice, interval: f64) -> Finding {
    let coil = air_coil(dice);
    let exact = 0.5 * MU0 * self_inductance(&coil);
    judged(&format!("{coil:?}"), &builders::air_coil(&coil), interval, exact)
}

/// Two random coils that both carry current, against self and mutual inductance.
pub fn one_coil_pair(dice: &mut Dice, interval: f64) -> Finding {
    let pair = coil_pair(dice);
    let [(first, n1, i1), (second, n2, i2)] = pair;
    let (mmf1, mmf2) = (n1 * i1, n2 * i2);
    let own = mmf1 * mmf1 * self_inductance(&first) + mmf2 * mmf2 * self_inductance(&second);
    let exact = MU0 * (0.5 * own + mmf1 * mmf2 * mutual_inductance(&first, &second));
    judged(&format!("{pair:?}"), &builders::air_coils(&pair), interval, exact)
}

/// Solves and judges: reached, inside, and at least as wide as the true error.
fn judged(case: &str, model: &gapwright::model::Model, interval: f64, exact: f64) -> Finding {
    match solve(model, interval) {
        Err(message) => Finding { efficiency: None, failure: Some(format!("{case}: {message}")) },
        Ok(solved) => {
            let sound = solved.reached && solved.holds(exact);
            let text = || {
                format!(
                    "{case}: [{}, {}] against {exact}, reached {}",
                    solved.low, solved.high, solved.reached
                )
            };
            Finding { efficiency: Some(solved.efficiency(exact)), failure: (!sound).then(text) }
        }
    }
}

/// A random gapped pot of permeability 1e6 and 5e5 against mode matching with ideal walls.
///
/// The reluctance R = 1/L is nearly a straight line in 1/µr, and both solutions give intervals of it: the straight line
/// to 1/µr = 0 must cover the ideal value. What is bent is of the order of the square of the core's share, below 1e-5.
pub fn one_gapped_pot(dice: &mut Dice, interval: f64) -> Finding {
    let pot = gapped_pot_case(dice);
    let exact = 0.5 * MU0 * gapped_pot(&pot, modes::N_FUNCTIONS);
    let solved =
        [1e6, 5e5].map(|permeability| solve(&builders::gapped_pot(&pot, permeability), interval));
    let [hard, soft] = match solved {
        [Ok(hard), Ok(soft)] => [hard, soft],
        [Err(message), _] | [_, Err(message)] => {
            return Finding { efficiency: None, failure: Some(format!("{pot:?}: {message}")) };
        }
    };
    let ends = [2.0 / hard.high - 1.0 / soft.low, 2.0 / hard.low - 1.0 / soft.high];
    let bend = 1e-5 / exact;
    let sound = hard.reached
        && soft.reached
        && ends[0] - bend <= 1.0 / exact
        && 1.0 / exact <= ends[1] + bend;
    // A harder core can only raise the inductance: this end needs no straight line.
    let below = hard.low <= exact && soft.low <= exact;
    let text = || format!("{pot:?}: R in {ends:?} against {}", 1.0 / exact);
    Finding { efficiency: None, failure: (!(sound && below)).then(text) }
}

/// A random sphere with its coil against the series: the inscribed polygon's low end and the circumscribed polygon's
/// high end must enclose it, for more iron in the same place cannot lower the inductance.
pub fn one_sphere(dice: &mut Dice, interval: f64) -> Finding {
    let case = sphere_coil(dice);
    let exact = 0.5 * MU0 * sphere::inductance(&case);
    let solved = [Chords::Inside, Chords::Outside]
        .map(|chords| solve(&builders::sphere(&case, 90, chords), interval));
    let [inside, outside] = match solved {
        [Ok(inside), Ok(outside)] => [inside, outside],
        [Err(message), _] | [_, Err(message)] => {
            return Finding { efficiency: None, failure: Some(format!("{case:?}: {message}")) };
        }
    };
    // 90 chords leave (π/90)²/8 = 1.5e-4 of the radius: the two polygons differ by less than 1e-3 of L.
    let close = (inside.coenergy() / outside.coenergy() - 1.0).abs() < interval + 1e-3;
    let sound =
        inside.reached && outside.reached && inside.low <= exact && exact <= outside.high && close;
    let text = || format!("{case:?}: {} … {} against {exact}", inside.low, outside.high);
    Finding { efficiency: None, failure: (!sound).then(text) }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::table::EFFICIENCY_MAX;

    /// Fails with the first cases, tells the ratios.
    #[track_caller]
    fn assert_sound(name: &str, summary: &Summary) {
        let shown: Vec<&String> = summary.failures.iter().take(5).collect();
        assert!(
            shown.is_empty(),
            "{} of {} failed: {shown:#?}",
            summary.failures.len(),
            summary.n_cases
        );
        let mut text = format!("{name}: {} cases, all inside", summary.n_cases);
        if let Some([least, median, largest]) = summary.efficiency {
            text.push_str(&format!(
                "; interval/true error: least {least:.2}, median {median:.2}, largest {largest:.2}"
            ));
        }
        crate::say(&text);
        if let Some([.., largest]) = summary.efficiency {
            // The table's limit for single cases, here for every random one.
            assert!(largest <= EFFICIENCY_MAX, "{name}: interval/true error {largest}");
        }
    }

    #[test]
    fn a_campaign_notices_a_wrong_inductance() {
        // Half a per cent off against an interval of 0.1 %: every case must be reported.
        let wrong = |dice: &mut Dice| {
            let coil = air_coil(dice);
            judged(
                "wrong on purpose",
                &builders::air_coil(&coil),
                1e-3,
                1.005 * 0.5 * MU0 * self_inductance(&coil),
            )
        };
        assert_eq!(run(5, 1, wrong).failures.len(), 5);
    }

    #[test]
    fn the_exact_value_of_every_air_coil_lies_in_its_interval() {
        let summary = run(share_of(2000), 10_000, |g| one_air_coil(g, 1e-3));
        assert_sound("air coils at 0.1 %", &summary);
    }

    #[test]
    fn the_exact_energy_of_every_coil_pair_lies_in_its_interval() {
        let summary = run(share_of(500), 20_000, |g| one_coil_pair(g, 1e-2));
        assert_sound("coil pairs at 1 %", &summary);
    }

    #[test]
    fn every_gapped_pot_agrees_with_mode_matching() {
        let summary = run(share_of(200), 30_000, |g| one_gapped_pot(g, 5e-4));
        assert_sound("gapped pots at 0.05 %", &summary);
    }

    #[test]
    fn every_sphere_with_a_coil_agrees_with_the_series() {
        let summary = run(share_of(100), 40_000, |g| one_sphere(g, 1e-3));
        assert_sound("spheres at 0.1 %", &summary);
    }
}
