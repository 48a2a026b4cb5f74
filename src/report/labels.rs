//! Greedy placement of labels so that no two overlap and none leaves its page.

use super::svg::{Rect, text_width};

/// A label that wants to stand near its anchor.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Wish {
    /// The place that the label speaks of [px].
    pub anchor: [f64; 2],
    pub lines: Vec<String>,
}

/// Distance between baselines, in font sizes.
pub(super) const LINE: f64 = 1.25;
/// Free room between two labels [px].
const AIR: f64 = 5.0;

/// Room that a label takes [px].
pub(super) fn size_of(lines: &[String], size: f64) -> [f64; 2] {
    let width = lines.iter().map(|l| text_width(l, size)).fold(0.0, f64::max);
    [width, LINE * size * lines.len() as f64]
}

/// Stacks labels in one column at `x`, in the order of their anchors' heights, each as near to its anchor as the
/// ones above allow. Returns one box a wish, in the order of the wishes; all lie in `top` … the larger of `bottom`
/// and what the stack needs.
pub(super) fn column(wishes: &[Wish], x: f64, [top, bottom]: [f64; 2], size: f64) -> Vec<Rect> {
    let mut order: Vec<usize> = (0..wishes.len()).collect();
    let key = |i: usize| (wishes[i].anchor[1], -wishes[i].anchor[0]);
    order.sort_by(|&a, &b| key(a).0.total_cmp(&key(b).0).then(key(a).1.total_cmp(&key(b).1)));
    let mut boxes = vec![Rect { x, y: 0.0, width: 0.0, height: 0.0 }; wishes.len()];
    let mut free = top;
    for &i in &order {
        let [width, height] = size_of(&wishes[i].lines, size);
        let y = (wishes[i].anchor[1] - 0.5 * height).max(free);
        boxes[i] = Rect { x, y, width, height };
        free = y + height + AIR;
    }
    // What hangs below the bottom is pushed up, as far as the ones above can move.
    let needed: f64 = boxes.iter().map(|b| b.height + AIR).sum();
    let mut limit = bottom.max(top + needed);
    for &i in order.iter().rev() {
        boxes[i].y = boxes[i].y.min(limit - boxes[i].height);
        limit = boxes[i].y - AIR;
    }
    boxes
}

/// Number of directions that are tried round an anchor.
const N_DIRECTIONS: usize = 16;
/// Steps outwards that are tried, each of `STEP` px.
const N_STEPS: usize = 12;
const STEP: f64 = 11.0;

/// Puts each label on the nearest free place round its anchor inside `page`, clear of `taken` and of one another;
/// `None` where there is no room. Places found are added to `taken`.
pub(super) fn around(
    wishes: &[Wish],
    page: &Rect,
    size: f64,
    taken: &mut Vec<Rect>,
) -> Vec<Option<Rect>> {
    let mut places = vec![];
    for wish in wishes {
        let place =
            candidates(wish, size).find(|c| page.holds(c) && taken.iter().all(|t| !t.overlaps(c)));
        taken.extend(place);
        places.push(place);
    }
    places
}

/// Boxes round the anchor, nearest first.
fn candidates(wish: &Wish, size: f64) -> impl Iterator<Item = Rect> + '_ {
    let [width, height] = size_of(&wish.lines, size);
    (1..=N_STEPS).flat_map(move |step| {
        (0..N_DIRECTIONS).map(move |direction| {
            let angle = std::f64::consts::TAU * direction as f64 / N_DIRECTIONS as f64;
            let (sin, cos) = angle.sin_cos();
            let away = STEP * step as f64;
            Rect {
                x: wish.anchor[0] + cos * (away + 0.5 * width) - 0.5 * width,
                y: wish.anchor[1] - sin * (away + 0.5 * height) - 0.5 * height,
                width,
                height,
            }
        })
    })
}

/// The point of a box that is nearest to `anchor`: where a leader ends.
pub(super) fn nearest(rect: &Rect, anchor: [f64; 2]) -> [f64; 2] {
    [anchor[0].clamp(rect.x, rect.x + rect.width), anchor[1].clamp(rect.y, rect.y + rect.height)]
}

#[cfg(test)]
mod tests {
    use super::*;

    fn wishes(n: usize, spread: f64) -> Vec<Wish> {
        let wish = |i: usize| Wish {
            anchor: [
                100.0 + spread * ((37 * i) % 11) as f64,
                100.0 + spread * ((17 * i) % 7) as f64,
            ],
            lines: vec![format!("label {i}"); 1 + i % 2],
        };
        (0..n).map(wish).collect()
    }

    #[track_caller]
    fn check_apart(boxes: &[Rect]) {
        for (i, a) in boxes.iter().enumerate() {
            assert!(boxes[..i].iter().all(|b| !a.overlaps(b)), "box {i} overlaps another");
        }
    }

    #[test]
    fn a_column_keeps_order_and_distance_even_when_all_anchors_coincide() {
        for spread in [0.0, 3.0, 40.0] {
            let wishes = wishes(14, spread);
            let boxes = column(&wishes, 300.0, [20.0, 380.0], 11.0);
            check_apart(&boxes);
            assert!(boxes.iter().all(|b| 20.0 <= b.y + 1e-9));
        }
    }

    #[test]
    fn a_column_that_fits_ends_above_its_bottom() {
        let mut wishes = wishes(5, 0.0);
        for wish in &mut wishes {
            wish.anchor[1] = 379.0;
        }
        let boxes = column(&wishes, 300.0, [20.0, 380.0], 11.0);
        check_apart(&boxes);
        assert!(boxes.iter().all(|b| b.y + b.height <= 380.0));
    }

    #[test]
    fn labels_round_anchors_stay_apart_and_on_the_page() {
        let page = Rect { x: 0.0, y: 0.0, width: 400.0, height: 300.0 };
        let mut taken = vec![Rect { x: 90.0, y: 60.0, width: 60.0, height: 40.0 }];
        let places: Vec<Rect> =
            around(&wishes(20, 2.0), &page, 11.0, &mut taken).into_iter().flatten().collect();
        assert!(places.len() > 12, "only {} of 20 placed", places.len());
        check_apart(&taken);
        assert!(places.iter().all(|p| page.holds(p)));
    }

    #[test]
    fn a_label_without_room_is_left_out() {
        let page = Rect { x: 0.0, y: 0.0, width: 20.0, height: 10.0 };
        assert_eq!(around(&wishes(1, 0.0), &page, 11.0, &mut vec![]), vec![None]);
    }
}
