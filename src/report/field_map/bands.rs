//! |B| at the corners of triangles → one area a colour band, triangles of one band merged.

use crate::mesh::Mesh;
use crate::report::dots::{CHORD, Dot, dot, thin_out};

/// A corner of a piece: its place on the page [px] and its value in units of bands.
pub(super) type Corner = ([f64; 2], f64);

/// Loops round the places whose value lies in each band k … k + 1; what lies above the last joins it.
///
/// Band 0 is left out: it is the ground that the others are painted on.
pub(super) fn band_loops(
    triangles: &[(usize, [[f64; 2]; 3])],
    value: &[[f64; 3]],
    n_bands: usize,
) -> Vec<Vec<Vec<Dot>>> {
    let mut sides: Vec<Vec<Side>> = vec![vec![]; n_bands];
    let (mut above, mut between) = (vec![], vec![]);
    for ((_, corners), value) in triangles.iter().zip(value) {
        let polygon = [0, 1, 2].map(|k| (corners[k], value[k]));
        let low = value.iter().copied().fold(f64::MAX, f64::min).max(0.0);
        let high = value.iter().copied().fold(0.0, f64::max);
        let first = (low as usize).min(n_bands - 1);
        let last = (high as usize).min(n_bands - 1);
        if last == 0 {
            continue;
        }
        if first == last {
            push_sides(&mut sides[first], &polygon);
            continue;
        }
        above.clear();
        above.extend(polygon);
        for band in first..last {
            let top = (band + 1) as f64;
            keep(&above, top, -1.0, &mut between);
            push_sides(&mut sides[band], &between);
            keep(&above, top, 1.0, &mut between);
            std::mem::swap(&mut above, &mut between);
        }
        push_sides(&mut sides[last], &above);
    }
    sides[0].clear();
    sides.into_iter().map(|sides| loops(outer_sides(sides))).collect()
}

/// Value of each corner of `triangles`, averaged over those triangles of one region that meet there: the jumps that
/// this removes are discretisation, those at material boundaries stay. For eyes only; field.vtu has the raw values.
pub(super) fn smoothed(
    mesh: &Mesh,
    triangles: &[(usize, [[f64; 2]; 3])],
    raw: &[[f64; 3]],
) -> Vec<[f64; 3]> {
    // The sums of one vertex are a short list, one entry a region: (region, sum, count, next entry).
    let mut first = vec![usize::MAX; mesh.points.len()];
    let mut sums: Vec<(u16, f64, f64, usize)> = vec![];
    let find = |first: &[usize], sums: &[(u16, f64, f64, usize)], t: usize, k: usize| {
        let mut at = first[mesh.triangles[t][k] as usize];
        while at != usize::MAX && sums[at].0 != mesh.regions[t].0 {
            at = sums[at].3;
        }
        at
    };
    for (t, _) in triangles {
        for (k, &b) in raw[*t].iter().enumerate().filter(|(_, b)| b.is_finite()) {
            let mut at = find(&first, &sums, *t, k);
            if at == usize::MAX {
                let head = &mut first[mesh.triangles[*t][k] as usize];
                sums.push((mesh.regions[*t].0, 0.0, 0.0, *head));
                at = sums.len() - 1;
                *head = at;
            }
            sums[at].1 += b;
            sums[at].2 += 1.0;
        }
    }
    let mean = |t: usize, k: usize| sums.get(find(&first, &sums, t, k)).map_or(0.0, |s| s.1 / s.2);
    triangles.iter().map(|(t, _)| [0, 1, 2].map(|k| mean(*t, k))).collect()
}

/// The part of a convex polygon where side·(value − level) ≥ 0 (Sutherland–Hodgman, one plane).
pub(super) fn keep(polygon: &[Corner], level: f64, side: f64, kept: &mut Vec<Corner>) {
    kept.clear();
    for (i, &p) in polygon.iter().enumerate() {
        let q = polygon[(i + 1) % polygon.len()];
        let (a, b) = (side * (p.1 - level), side * (q.1 - level));
        if 0.0 <= a {
            kept.push(p);
        }
        if (0.0 <= a) != (0.0 <= b) {
            // From the lower end, so that both neighbours of an edge cut it at the same bits.
            let (p, q) = if p.1 < q.1 { (p, q) } else { (q, p) };
            let t = (level - p.1) / (q.1 - p.1);
            kept.push(([p.0[0] + t * (q.0[0] - p.0[0]), p.0[1] + t * (q.0[1] - p.0[1])], level));
        }
    }
}

/// Adds the sides of a piece; sides without length are dropped.
fn push_sides(sides: &mut Vec<Side>, piece: &[Corner]) {
    let Some(last) = piece.last() else { return };
    let mut from = code(dot(last.0));
    for corner in piece {
        let to = code(dot(corner.0));
        if from != to {
            sides.push([from, to]);
        }
        from = to;
    }
}

/// A directed side, its ends as codes: one number a dot compares twice as fast as two.
type Side = [u64; 2];

/// Both coordinates in one number, in the same order; the sign bits are turned so that negative ones come first.
fn code([x, y]: Dot) -> u64 {
    let unsigned = |v: i32| u64::from(v as u32 ^ 0x8000_0000);
    unsigned(x) << 32 | unsigned(y)
}

fn decode(code: u64) -> Dot {
    [code >> 32, code & 0xffff_ffff].map(|v| (v as u32 ^ 0x8000_0000) as i32)
}

/// The sides that no neighbour has the other way round.
fn outer_sides(mut sides: Vec<Side>) -> Vec<Side> {
    let undirected = |s: &Side| u128::from(s[0].min(s[1])) << 64 | u128::from(s[0].max(s[1]));
    sides.sort_unstable_by_key(undirected);
    let mut outer = vec![];
    for group in sides.chunk_by(|a, b| undirected(a) == undirected(b)) {
        let n_forth = group.iter().filter(|s| s[0] < s[1]).count();
        let n_back = group.len() - n_forth;
        let is_kept = |s: &&Side| (s[0] < s[1]) == (n_back < n_forth);
        outer.extend(group.iter().filter(is_kept).take(n_forth.abs_diff(n_back)));
    }
    outer
}

/// Joins directed sides into loops. As many sides leave a corner as enter it, so every walk comes back to its start.
fn loops(mut sides: Vec<Side>) -> Vec<Vec<Dot>> {
    sides.sort_unstable();
    let mut is_used = vec![false; sides.len()];
    let mut loops = vec![];
    for start in 0..sides.len() {
        let (mut line, mut at) = (vec![decode(sides[start][0])], start);
        while !is_used[at] {
            is_used[at] = true;
            let corner = sides[at][1];
            line.push(decode(corner));
            let first = sides.partition_point(|s| s[0] < corner);
            let leaving = sides[first..].iter().take_while(|s| s[0] == corner).count();
            match (first..first + leaving).find(|&i| !is_used[i]) {
                Some(next) => at = next,
                None => break,
            }
        }
        if 3 < line.len() {
            line = thin_out(&line, CHORD);
            line.pop();
            loops.push(line);
        }
    }
    loops
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Twice the area inside a loop, in square dots.
    fn doubled_area(line: &[Dot]) -> i64 {
        let cross = |i: usize| {
            let (p, q) = (line[i], line[(i + 1) % line.len()]);
            i64::from(p[0]) * i64::from(q[1]) - i64::from(p[1]) * i64::from(q[0])
        };
        (0..line.len()).map(cross).sum()
    }

    #[test]
    fn bands_of_a_triangle_cover_it() {
        let triangle = vec![(0, [[0.0, 0.0], [100.0, 0.0], [0.0, 100.0]])];
        let bands = band_loops(&triangle, &[[1.2, 4.7, 2.4]], 6);
        assert_eq!(bands.iter().map(Vec::len).collect::<Vec<_>>(), [0, 1, 1, 1, 1, 0]);
        let whole: i64 = bands.iter().flatten().map(|l| doubled_area(l)).sum();
        // Corners are rounded to a dot: 4 cuts of some 7000 dots, half a dot each.
        assert!((whole - 100_000_000).abs() < 30_000, "{whole}");
    }

    #[test]
    fn triangles_of_one_band_become_one_loop_without_inner_sides() {
        let triangles = vec![
            (0, [[0.0, 0.0], [10.0, 0.0], [0.0, 10.0]]),
            (1, [[10.0, 0.0], [10.0, 10.0], [0.0, 10.0]]),
        ];
        let bands = band_loops(&triangles, &[[1.5; 3], [1.5; 3]], 3);
        assert_eq!(bands[1].len(), 1);
        assert_eq!((bands[1][0].len(), doubled_area(&bands[1][0])), (4, 2_000_000));
    }

    #[test]
    fn a_hole_is_a_loop_the_other_way_round() {
        // A square ring of eight triangles round an empty middle.
        let (outer, inner) = (
            [[0.0, 0.0], [9.0, 0.0], [9.0, 9.0], [0.0, 9.0]],
            [[3.0, 3.0], [6.0, 3.0], [6.0, 6.0], [3.0, 6.0]],
        );
        let mut triangles = vec![];
        for k in 0..4 {
            let l = (k + 1) % 4;
            triangles.push((0, [outer[k], outer[l], inner[k]]));
            triangles.push((0, [outer[l], inner[l], inner[k]]));
        }
        let bands = band_loops(&triangles, &[[1.5; 3]; 8], 2);
        let mut areas: Vec<i64> = bands[1].iter().map(|l| doubled_area(l)).collect();
        areas.sort_unstable();
        assert_eq!(areas, [-180_000, 1_620_000]);
    }
}
