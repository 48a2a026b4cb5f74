//! Hot spots on the field map: a ring each, and its value where there is room.

use super::{TEXT, View};
use crate::model::Point;
use crate::report::labels::{Wish, around, nearest};
use crate::report::svg::{Anchor, Canvas, INK, Rect};
use crate::results::HotSpot;
use crate::units::engineering;

/// Radius of a ring [px].
const RADIUS: f64 = 4.5;

/// One ring with a pale rim, so that it shows on any colour.
pub(super) fn ring(canvas: &mut Canvas, at: [f64; 2]) {
    canvas.circle(at, RADIUS, "fill=\"none\" stroke=\"#ffffff\" stroke-width=\"3\"");
    canvas.circle(at, RADIUS, &format!("fill=\"none\" stroke=\"{INK}\" stroke-width=\"1.3\""));
}

/// Spots inside the picture, highest first; one whose ring would cover another's is left to the table of results.
pub(super) fn shown<'a>(hot_spots: &'a [HotSpot], view: &View) -> Vec<(&'a HotSpot, [f64; 2])> {
    let mut shown: Vec<(&HotSpot, [f64; 2])> = vec![];
    for spot in hot_spots {
        let at = view.at(Point { r: spot.r, z: spot.z });
        let is_seen = spot.r <= view.r_max && (view.z_bottom..=view.z_top).contains(&spot.z);
        let is_apart =
            |other: &[f64; 2]| 2.0 * RADIUS + 3.0 <= (at[0] - other[0]).hypot(at[1] - other[1]);
        if is_seen && shown.iter().all(|(_, other)| is_apart(other)) {
            shown.push((spot, at));
        }
    }
    shown
}

/// Rings at the hot spots, with their values where there is room.
pub(super) fn hot_spots(canvas: &mut Canvas, spots: &[(&HotSpot, [f64; 2])], frame: &Rect) {
    let around_ring =
        |m: [f64; 2]| Rect { x: m[0] - 7.0, y: m[1] - 7.0, width: 14.0, height: 14.0 };
    let mut taken: Vec<Rect> = spots.iter().map(|(_, at)| around_ring(*at)).collect();
    let wish = |(spot, at): &(&HotSpot, [f64; 2])| Wish {
        anchor: *at,
        lines: vec![engineering(spot.flux_density, "T", 3)],
    };
    let wishes: Vec<Wish> = spots.iter().map(wish).collect();
    let page = Rect {
        x: frame.x + 3.0,
        y: frame.y + 3.0,
        width: frame.width - 6.0,
        height: frame.height - 6.0,
    };
    for (wish, place) in wishes.iter().zip(around(&wishes, &page, TEXT, &mut taken)) {
        let mark = wish.anchor;
        ring(canvas, mark);
        let Some(rect) = place else { continue };
        let end = nearest(&rect, mark);
        let length = (end[0] - mark[0]).hypot(end[1] - mark[1]).max(1e-9);
        let edge = [0, 1].map(|k| mark[k] + RADIUS * (end[k] - mark[k]) / length);
        canvas.line(edge, end, &format!("stroke=\"{INK}\" stroke-width=\"0.9\""));
        canvas.rect(&rect, "rx=\"2\" fill=\"#ffffff\" fill-opacity=\"0.88\"");
        let at = [rect.x + 0.5 * rect.width, rect.y + 0.97 * TEXT];
        canvas.text(at, TEXT, Anchor::Middle, "", &wish.lines[0]);
    }
}
