//! The model's gaps → areas and pole faces, leg by leg.

use super::GapPole;
use crate::geometry::Leg;
use crate::model::{Across, Dimensions, Gap, Model};
use crate::units::{Meter, SquareMeter};
use std::f64::consts::PI;

/// Gaps whose faces are nearer than this touch: far below any ground gap, far above the rounding of coordinates.
const TOUCHING: Meter = 1e-9;

/// Plain area A of a gap in `leg` [m²], π(r_o² − r_i²); 0 where that gap does not cross that leg.
pub fn gap_area(model: &Model, gap_index: usize, leg: Leg) -> SquareMeter {
    match radii(model, gap_index, leg) {
        Some([inner, outer]) => PI * (outer * outer - inner * inner),
        None => 0.0,
    }
}

/// Pole faces of a gap in `leg`, in place; `None` where that gap does not cross that leg.
///
/// Gaps of one leg that touch (a spacer beside a ground gap) bulge as one, so `length` is their sum. Flanks reach:
/// - outside of the post, inside of the wall: to the plate, i.e. the window's end
/// - hole: to the core's end, but at most one hole radius, as the axis is a line of flux (exact windows show the
///   smaller of height and width to govern)
/// - outside of the wall: to the core's end
/// - next to another gap of the same leg: half way to it
pub fn gap_pole(model: &Model, gap_index: usize, leg: Leg) -> Option<GapPole> {
    let [inner_radius, outer_radius] = radii(model, gap_index, leg)?;
    let dimensions = model.core.as_ref()?.dimensions(&model.gaps);
    let room = Room::around(&model.gaps, gap_index, leg);
    let to_plate = room.heights(dimensions.window_top);
    let to_end = room.heights(dimensions.core_top);
    let (inner_heights, outer_heights) = match leg {
        Leg::Wall => (to_plate, to_end),
        _ => (to_end.map(|height| height.min(inner_radius)), to_plate),
    };
    let window_height = 2.0 * dimensions.window_top;
    Some(GapPole {
        inner_radius,
        outer_radius,
        length: room.length,
        window_height,
        inner_heights,
        outer_heights,
    })
}

/// Where a gap lies in a leg.
pub(super) struct Span {
    gap: usize,
    pub bottom: Meter,
    pub top: Meter,
}

/// The gaps of a leg by height; spacers are stacked about z = 0 in the sheet's order.
pub(super) fn spans(gaps: &[Gap], leg: Leg) -> Vec<Span> {
    let is_spacer = |gap: &&Gap| gap.across == Across::Spacer;
    let mut stacked = -0.5 * gaps.iter().filter(is_spacer).map(|gap| gap.length).sum::<Meter>();
    let mut spans = Vec::new();
    for (gap, it) in gaps.iter().enumerate().filter(|(_, it)| crosses(it, leg)) {
        let bottom = if is_spacer(&it) { stacked } else { it.center - 0.5 * it.length };
        let top = bottom + it.length;
        if is_spacer(&it) {
            stacked = top;
        }
        spans.push(Span { gap, bottom, top });
    }
    spans.sort_by(|a, b| a.bottom.total_cmp(&b.bottom));
    spans
}

/// True when `gap` lies in `leg`.
fn crosses(gap: &Gap, leg: Leg) -> bool {
    match leg {
        Leg::Post => gap.across != Across::Wall,
        Leg::Wall => gap.across != Across::Post,
        Leg::UpperPlate | Leg::LowerPlate => false,
    }
}

/// Inner and outer radius of a leg; `None` for plates and for the wall of a form without one.
fn leg_radii(dimensions: &Dimensions, leg: Leg) -> Option<[Meter; 2]> {
    match leg {
        Leg::Post => Some([dimensions.hole_radius, dimensions.post_radius]),
        Leg::Wall => dimensions.wall_radii,
        Leg::UpperPlate | Leg::LowerPlate => None,
    }
}

fn radii(model: &Model, gap_index: usize, leg: Leg) -> Option<[Meter; 2]> {
    let core = model.core.as_ref()?;
    let gap = model.gaps.get(gap_index)?;
    if !crosses(gap, leg) {
        return None;
    }
    leg_radii(&core.dimensions(&model.gaps), leg)
}

/// One gap with all that touch it, and its neighbours along the leg.
struct Room {
    bottom: Meter,
    top: Meter,
    /// Sum of the touching gaps' lengths.
    length: Meter,
    /// Top of the next gap below, bottom of the next gap above.
    neighbours: [Option<Meter>; 2],
}

impl Room {
    /// Joins gaps that touch and keeps the one that holds `gap_index`.
    fn around(gaps: &[Gap], gap_index: usize, leg: Leg) -> Room {
        let mut rooms: Vec<Room> = Vec::new();
        let mut wanted = 0;
        for Span { gap, bottom, top } in spans(gaps, leg) {
            let length = gaps[gap].length;
            match rooms.last_mut() {
                Some(last) if bottom <= last.top + TOUCHING => {
                    last.top = last.top.max(top);
                    last.length += length;
                }
                _ => rooms.push(Room { bottom, top, length, neighbours: [None; 2] }),
            }
            if gap == gap_index {
                wanted = rooms.len() - 1;
            }
        }
        let neighbours = [
            wanted.checked_sub(1).map(|i| rooms[i].top),
            rooms.get(wanted + 1).map(|room| room.bottom),
        ];
        Room { neighbours, ..rooms.swap_remove(wanted) }
    }

    /// Heights of the flanks [below, above] up to ±`end` or half way to the neighbour.
    fn heights(&self, end: Meter) -> [Meter; 2] {
        let below = self.neighbours[0].map_or(self.bottom + end, |top| 0.5 * (self.bottom - top));
        let above = self.neighbours[1].map_or(end - self.top, |bottom| 0.5 * (bottom - self.top));
        [below.max(0.0), above.max(0.0)]
    }
}
