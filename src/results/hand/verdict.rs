//! The estimate against the field: how far off, and which reluctance is to blame.

use super::HandSum;
use crate::geometry::RegionKind;
use crate::model::{Claim, Estimate, GapCorrection};
use crate::results::{LedgerRow, Verdict};
use crate::units::{Henry, PerHenry};

/// Judges the estimate: judged/computed − 1 within ± its tolerance.
///
/// - `hand`: judged where nothing is stated; else only context for the sentence
/// - `computed`: the field's inductance [H] of the winding with `turns`
/// - `ledger`: the field's reluctances
///
/// `None` when nothing is stated and there is no hand sum either.
pub fn verdict(
    estimate: &Estimate,
    hand: Option<&HandSum>,
    computed: Henry,
    turns: f64,
    ledger: &[LedgerRow],
) -> Option<Verdict> {
    let inductance = match estimate.claim {
        Claim::Inductance(inductance) => inductance,
        Claim::InductanceFactor(factor) => factor * turns * turns,
        Claim::HandSum => hand?.inductance,
    };
    let is_hand_sum = estimate.claim == Claim::HandSum;
    let deviation = inductance / computed - 1.0;
    let within_tolerance = deviation.abs() <= estimate.tolerance;
    let blame = match hand {
        Some(hand) if is_hand_sum => blame(hand, ledger, within_tolerance),
        Some(hand) => stated_blame(hand, inductance, computed, turns, ledger, within_tolerance),
        None => "there is no hand sum to compare reluctance by reluctance".into(),
    };
    Some(Verdict {
        inductance,
        is_hand_sum,
        deviation,
        tolerance: estimate.tolerance,
        within_tolerance,
        blame,
    })
}

/// One sentence: the reluctance in which hand sum and field differ most (absolute difference, see `suspects`).
///
/// Within the tolerance nothing is to blame, and the sentence only says where the largest difference sits.
pub fn blame(hand: &HandSum, ledger: &[LedgerRow], within_tolerance: bool) -> String {
    let Some(suspect) = worst(suspects(hand, ledger)) else {
        return "the field has no single set of reluctances to compare with the hand sum".into();
    };
    let verb = if within_tolerance { "differs most" } else { "is to blame" };
    format!("{} {verb}: {}", suspect.title(), suspect.account())
}

/// The sentence on a number of the user's own: totals first, then the hand sum as context.
fn stated_blame(
    hand: &HandSum,
    stated: Henry,
    computed: Henry,
    turns: f64,
    ledger: &[LedgerRow],
    within_tolerance: bool,
) -> String {
    let n2 = turns * turns;
    let (asked, field) = per_henry_pair(n2 / stated, n2 / computed);
    let totals = format!("the stated figure stands for {asked} in all, the field has {field}");
    if within_tolerance {
        return totals;
    }
    let plain = n2 / hand.plain_total;
    if has_correction(hand) && (stated / plain - 1.0).abs() < SAME_FIGURE {
        return format!(
            "{totals}; it is what the sum gives without any correction for the gaps' bulging flux"
        );
    }
    match worst(suspects(hand, ledger)) {
        Some(suspect) => {
            let (sum, _) = per_henry_pair(hand.total, n2 / computed);
            format!(
                "{totals}; the hand sum ({sum}) is furthest off in {}: {}",
                suspect.title(),
                suspect.account()
            )
        }
        None => totals,
    }
}

/// Two sums on paper are taken for the same within this: figures rounded to two or three digits.
const SAME_FIGURE: f64 = 0.01;

/// False when the correction does nothing to tell the sums apart.
fn has_correction(hand: &HandSum) -> bool {
    hand.correction != GapCorrection::None && SAME_FIGURE < hand.plain_total / hand.total - 1.0
}

/// One reluctance seen twice.
#[derive(Debug, Clone, PartialEq)]
struct Suspect {
    name: String,
    kind: Kind,
    field: PerHenry,
    hand: Option<PerHenry>,
}

#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Kind {
    Iron,
    Gap,
    Joint,
    /// Air round a core without gaps.
    Air,
    /// A part that the sum does not know.
    Part,
}

/// Pairs the field's reluctances with the hand sum's.
///
/// Bulging flux of a gap lies in the window, the windings, the hole and outside, so the ledger books its energy there:
/// a gap alone has R/F² in the field where the hand sum has R/F. The air's reluctance is therefore given to the gaps,
/// in proportion to their own; then the sum over iron, gaps and joints is N²/L on either side. Empty when the ledger
/// has no reluctances (several currents) or no rows.
fn suspects(hand: &HandSum, ledger: &[LedgerRow]) -> Vec<Suspect> {
    if ledger.is_empty() {
        return Vec::new();
    }
    let mut suspects: Vec<Suspect> = hand
        .rows
        .iter()
        .map(|row| Suspect {
            name: row.region.clone(),
            kind: kind_of(row.kind),
            field: 0.0,
            hand: Some(row.reluctance),
        })
        .collect();
    let mut air = 0.0;
    for row in ledger {
        let Some(field) = row.reluctance else { return Vec::new() };
        if let Some(suspect) = suspects.iter_mut().find(|s| s.name == row.region) {
            suspect.field += field;
        } else if hand.left_out.contains(&row.region) {
            suspects.push(Suspect {
                name: row.region.clone(),
                kind: Kind::Part,
                field,
                hand: None,
            });
        } else {
            air += field;
        }
    }
    share_air(&mut suspects, air);
    suspects
}

fn kind_of(region: RegionKind) -> Kind {
    match region {
        RegionKind::Gap { .. } => Kind::Gap,
        RegionKind::Joint(_) => Kind::Joint,
        _ => Kind::Iron,
    }
}

fn share_air(suspects: &mut Vec<Suspect>, air: PerHenry) {
    let is_gap = |suspect: &&mut Suspect| suspect.kind == Kind::Gap;
    let in_gaps: PerHenry = suspects.iter_mut().filter(is_gap).map(|gap| gap.field).sum();
    if 0.0 < in_gaps {
        suspects.iter_mut().filter(is_gap).for_each(|gap| gap.field *= 1.0 + air / in_gaps);
    } else if air != 0.0 {
        suspects.push(Suspect { name: "air".into(), kind: Kind::Air, field: air, hand: None });
    }
}

/// The largest absolute difference; the first of equals.
fn worst(suspects: Vec<Suspect>) -> Option<Suspect> {
    let mut worst: Option<Suspect> = None;
    for suspect in suspects {
        if worst.as_ref().is_none_or(|worst| worst.difference() < suspect.difference()) {
            worst = Some(suspect);
        }
    }
    worst
}

impl Suspect {
    fn difference(&self) -> PerHenry {
        (self.hand.unwrap_or(0.0) - self.field).abs()
    }

    /// "the post", "the post gap", "gap 2", "the gap `air`".
    fn title(&self) -> String {
        match self.kind {
            Kind::Gap if !self.name.contains("gap") => {
                format!("the gap `{}`", self.name)
            }
            Kind::Gap if self.name.starts_with("gap ") => self.name.clone(),
            Kind::Iron | Kind::Gap | Kind::Joint => format!("the {}", self.name),
            Kind::Air => "the air round the core".into(),
            Kind::Part => format!("the part `{}`", self.name),
        }
    }

    /// The two numbers, and what their difference means.
    fn account(&self) -> String {
        let Some(hand) = self.hand else {
            let (field, _) = per_henry_pair(self.field, 0.0);
            return format!("the field gives it {field}, the hand sum leaves it out");
        };
        let (by_hand, field) = per_henry_pair(hand, self.field);
        format!("the hand sum gives it {by_hand}, the field {field} ({})", self.meaning(hand))
    }

    fn meaning(&self, hand: PerHenry) -> &'static str {
        match (self.kind, self.field < hand) {
            (Kind::Gap, true) => "its flux bulges more than the correction allows",
            (Kind::Gap, false) => "its flux bulges less than the correction allows",
            (Kind::Joint, true) => "part of the flux does not pass the mating faces",
            (Kind::Joint, false) => "the flux crowds at the mating faces",
            (_, true) => "part of the flux leaves it or takes a shorter way than the mean path",
            (_, false) => "its flux crowds, or its permeability has fallen below the initial one",
        }
    }
}

/// Two reluctances in one unit (/H, /mH, /µH, /nH), with as many digits as tell them apart, three at least.
fn per_henry_pair(a: PerHenry, b: PerHenry) -> (String, String) {
    let largest = a.abs().max(b.abs());
    let (scale, unit) = match largest {
        _ if 1e9 <= largest => (1e-9, "/nH"),
        _ if 1e6 <= largest => (1e-6, "/µH"),
        _ if 1e3 <= largest => (1e-3, "/mH"),
        _ => (1.0, "/H"),
    };
    let whole_digits = (largest * scale).max(1.0).log10().floor() as usize + 1;
    let show = |value: f64, n_digits: usize| {
        format!("{:.*} {unit}", n_digits.saturating_sub(whole_digits), value * scale)
    };
    /// Enough to tell apart what differs by more than the guaranteed interval.
    const N_DIGITS_MAX: usize = 6;
    for n_digits in 3..N_DIGITS_MAX {
        let pair = (show(a, n_digits), show(b, n_digits));
        if pair.0 != pair.1 {
            return pair;
        }
    }
    (show(a, N_DIGITS_MAX), show(b, N_DIGITS_MAX))
}
