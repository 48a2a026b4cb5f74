//! Points in whole hundredths of a pixel: exact to add and compare, quick to print, thinned where lines are straight.

/// A point in hundredths of a pixel: finer than any screen, exact to add and compare, quick to print.
pub(super) type Dot = [i32; 2];

/// Hundredths in a pixel.
pub(super) const DOTS: f64 = 100.0;

/// The dot nearest to a point; what is not a number becomes 0.
pub(super) fn dot(point: [f64; 2]) -> Dot {
    point.map(|x| (DOTS * x).round() as i32)
}

/// The dots nearest to points.
pub(super) fn dots(points: &[[f64; 2]]) -> Vec<Dot> {
    points.iter().map(|&p| dot(p)).collect()
}

/// Appends "M x y" and then "l" with steps from point to point; equal neighbours are dropped.
pub(super) fn push_dots(path: &mut String, dots: &[Dot]) {
    let Some(&first) = dots.first() else { return };
    path.push('M');
    push_hundredths(path, first[0]);
    path.push(' ');
    push_hundredths(path, first[1]);
    let mut last = first;
    let mut is_first = true;
    for &dot in dots {
        if dot != last {
            for axis in 0..2 {
                // Coordinates of a page never differ by more than i32 holds; saturation keeps rubbish harmless.
                let step = dot[axis].saturating_sub(last[axis]);
                if is_first {
                    path.push('l');
                    is_first = false;
                } else if 0 <= step {
                    path.push(' ');
                }
                push_hundredths(path, step);
            }
            last = dot;
        }
    }
}

/// Appends a number of hundredths as a decimal fraction without trailing zeros: 150 → "1.5".
pub(super) fn push_hundredths(path: &mut String, hundredths: i32) {
    if hundredths < 0 {
        path.push('-');
    }
    let (mut whole, rest) = (hundredths.unsigned_abs() / 100, hundredths.unsigned_abs() % 100);
    let mut digits = [0u8; 10];
    let mut n_digits = 0;
    while 0 < whole || n_digits == 0 {
        digits[n_digits] = (whole % 10) as u8;
        whole /= 10;
        n_digits += 1;
    }
    for digit in digits[..n_digits].iter().rev() {
        path.push(char::from(b'0' + digit));
    }
    if 0 < rest {
        path.push('.');
        path.push(char::from(b'0' + (rest / 10) as u8));
        if !rest.is_multiple_of(10) {
            path.push(char::from(b'0' + (rest % 10) as u8));
        }
    }
}

/// Largest distance between a dropped point and the chord that replaces it [dots]: below what a screen shows.
pub(super) const CHORD: i64 = (0.08 * DOTS) as i64;

/// Drops points that lie within `chord` dots of the straight line between the kept ones before and after them.
pub(super) fn thin_out(line: &[Dot], chord: i64) -> Vec<Dot> {
    let mut kept = Vec::with_capacity(line.len() / 2 + 2);
    kept.extend(line.first());
    let mut from = 0;
    while from + 1 < line.len() {
        let mut to = from + 1;
        while to + 1 < line.len() && to - from < N_SKIP_MAX {
            let (start, end) = (line[from], line[to + 1]);
            if !line[from + 1..=to].iter().all(|&p| is_near(p, start, end, chord)) {
                break;
            }
            to += 1;
        }
        kept.push(line[to]);
        from = to;
    }
    kept
}

/// Points between two kept ones at most, so that the look ahead stays short.
const N_SKIP_MAX: usize = 16;

/// True when `p` lies within `chord` of the line through `a` and `b`, and between them (of `a` when both coincide).
fn is_near(p: Dot, a: Dot, b: Dot, chord: i64) -> bool {
    let difference = |p: Dot, q: Dot| [0, 1].map(|k| i64::from(p[k]) - i64::from(q[k]));
    let (d, e) = (difference(b, a), difference(p, a));
    let squared = d[0] * d[0] + d[1] * d[1];
    if squared == 0 {
        return e[0] * e[0] + e[1] * e[1] <= chord * chord;
    }
    let (cross, along) = (d[0] * e[1] - d[1] * e[0], d[0] * e[0] + d[1] * e[1]);
    // In f64: the squares of cross products outgrow i64 on large pages.
    (0..=squared).contains(&along)
        && (cross as f64).powi(2) <= (chord * chord) as f64 * squared as f64
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn paths_are_short_and_drop_repeated_points() {
        let mut path = String::new();
        push_dots(&mut path, &dots(&[[0.0, -0.001], [0.001, 0.0], [1.5, 2.25], [1.0, 12.3]]));
        assert_eq!(path, "M0 0l1.5 2.25-0.5 10.05");
    }

    #[test]
    fn thinning_keeps_ends_and_corners() {
        let line: Vec<Dot> =
            (0..=30).map(|i| [100 * i, if i < 20 { 0 } else { 100 * (i - 20) }]).collect();
        let thin = thin_out(&line, 8);
        assert!(thin.len() < 8, "{thin:?}");
        assert_eq!((thin[0], thin[thin.len() - 1]), ([0, 0], [3000, 1000]));
        assert!(thin.contains(&[2000, 0]), "{thin:?}");
        // There and back again: the turning point stays.
        assert!(thin_out(&[[0, 0], [500, 0], [100, 0]], 8).contains(&[500, 0]));
    }
}
