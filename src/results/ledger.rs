//! The ledger: each region's share of ∫H·B dV and the reluctance that follows, beside the hand value.

use super::LedgerRow;
use super::collect::Work;
use super::hand::HandSum;
use crate::geometry::Outline;
use crate::units::PerHenry;

/// One row a region, in the outline's order but `outside` last; shares sum to 1.
///
/// - `total`: N²/L, `None` with several currents
pub fn rows(
    outline: &Outline,
    work: &[Work],
    total: Option<PerHenry>,
    hand: Option<&HandSum>,
) -> Vec<LedgerRow> {
    let sum: f64 = work.iter().map(|w| w.product).sum();
    let row = |k: usize| {
        let region = &outline.regions[k];
        let share = work[k].product / sum;
        LedgerRow {
            region: region.name.clone(),
            share,
            reluctance: total.map(|total| share * total),
            hand: hand.and_then(|hand| hand.reluctance(region.kind)),
        }
    };
    (1..outline.regions.len()).chain([0]).map(row).collect()
}
