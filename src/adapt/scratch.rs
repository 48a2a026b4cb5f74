use super::*;
use crate::mesh::{Cap, Chart, RegionId};
use crate::model::Point;
use spade::{ConstrainedDelaunayTriangulation as Cdt, Point2, Triangulation};

pub fn crude(rects: &[[f64; 4]], radius: f64, extra: &[[f64;2]]) -> Mesh {
    let n = 8;
    let mut pts: Vec<Point2<f64>> = vec![];
    for k in 0..=n { let a = -std::f64::consts::FRAC_PI_2 + k as f64 * std::f64::consts::PI / n as f64; let r = if k==0||k==n {0.0} else {radius*a.cos()}; pts.push(Point2::new(r, radius*a.sin())); }
    let mut segs: Vec<[usize;2]> = (0..n).map(|k| [k,k+1]).collect();
    let i0 = pts.len();
    for z in [-0.5,0.0,0.5] { pts.push(Point2::new(0.0, z*radius)); }
    segs.extend([[0,i0],[i0,i0+1],[i0+1,i0+2],[i0+2,n]]);
    for r in rects { let i = pts.len(); pts.extend([Point2::new(r[0],r[2]),Point2::new(r[1],r[2]),Point2::new(r[1],r[3]),Point2::new(r[0],r[3])]); 
      if r[0] > 0.0 { segs.extend([[i,i+1],[i+1,i+2],[i+2,i+3],[i+3,i]]);} else { segs.extend([[i,i+1],[i+1,i+2],[i+2,i+3]]); } }
    for e in extra { pts.push(Point2::new(e[0],e[1])); }
    let c: Cdt<Point2<f64>> = Cdt::bulk_load_cdt(pts, segs).unwrap();
    let points: Vec<Point> = c.vertices().map(|v| Point { r: v.position().x, z: v.position().y }).collect();
    let mut tri: Vec<[u32;3]> = c.inner_faces().map(|f| f.vertices().map(|v| v.fix().index() as u32)).collect();
    let mut regions: Vec<RegionId> = tri.iter().map(|t| { let p = t.map(|v| points[v as usize]); let (r,z)=((p[0].r+p[1].r+p[2].r)/3.0,(p[0].z+p[1].z+p[2].z)/3.0);
       RegionId(rects.iter().position(|q| q[0]<r&&r<q[1]&&q[2]<z&&z<q[3]).map_or(0, |k| k as u16+1)) }).collect();
    let mut points = points; let inf = points.len() as u32; points.push(Point{r:0.0,z:0.0});
    let mut charts = vec![Chart::Inside; tri.len()];
    let find = |k: usize| { let a = -std::f64::consts::FRAC_PI_2 + k as f64 * std::f64::consts::PI / n as f64; let p=Point2::new(if k==0||k==n {0.0} else {radius*a.cos()}, radius*a.sin()); points.iter().position(|q| (q.r-p.x).abs()+(q.z-p.y).abs()<1e-12).unwrap() as u32 };
    for k in 0..n { tri.push([inf, find(k+1), find(k)]); regions.push(RegionId(0)); charts.push(Chart::Cap(k as u8)); }
    // rotate longest first
    for t in tri.iter_mut() { let l = |i:usize| { let (p,q)=(points[t[i] as usize],points[t[(i+1)%3] as usize]); (p.r-q.r).hypot(p.z-q.z) }; let k=(0..3).max_by(|&a,&b| l(a).total_cmp(&l(b))).unwrap(); t.rotate_left(k); }
    let mut map = std::collections::BTreeMap::new(); let mut edges = vec![];
    let te: Vec<[u32;3]> = tri.iter().map(|t| [0,1,2].map(|k| { let mut e=[t[k],t[(k+1)%3]]; e.sort(); *map.entry(e).or_insert_with(|| { edges.push(e); edges.len() as u32-1 }) })).collect();
    let on_axis: Vec<bool> = points.iter().map(|p| p.r==0.0).collect();
    let np = points.len();
    Mesh { points, on_axis, triangles: tri, triangle_edges: te, edges, regions, charts, parents: vec![[u32::MAX;2];np], level_sizes: vec![np], cap: Cap{center_z:0.0,radius,n_facets:8} }
}

#[test]
fn air() {
    let mesh = crude(&[[0.02,0.03,-0.005,0.005]], 0.037, &[]);
    let c = Coefficients { reluctivity: vec![Reluctivity::Constant(1.0/MU0);2], current_density: vec![0.0, 100.0/1e-4] };
    let s = Solution { vertex: vec![0.0; mesh.points.len()], edge: vec![0.0; mesh.edges.len()] };
    let exact = 0.00028693034876300715;
    let r = rounds(mesh, c, s, &Rules::working(), &Accuracy { interval: 1e-5, n_unknowns_max: 100000 }, &mut |r| {
        eprintln!("{:7} {:?} {:.9e} {:.9e} low err {:.2e} high err {:.2e} ratio {:.2}", r.n_unknowns, r.effort, r.low, r.high, (exact-r.low)/exact, (r.high-exact)/exact, (r.high-r.low)/(exact-r.low));
    }).unwrap();
    let worst = (0..r.mesh.triangles.len()).map(|t| bound::defect(&r.mesh, &r.coefficients.current_density, &r.bound.flux, t).abs() / bound::scale(&r.mesh, &r.coefficients.current_density, &r.bound.flux, t).max(1e-300)).fold(0.0, f64::max);
    let minshare = r.bound.shares.iter().cloned().fold(f64::INFINITY, f64::min);
    eprintln!("worst defect {worst:e} min share {minshare:e}");
}
#[test]
fn rod() {
    let mut extra = vec![];
    for k in 0..11 { let z = -0.05+0.01*k as f64; extra.push([0.005,z]); extra.push([0.0,z]); }
    let mesh = crude(&[[0.0,0.005,-0.05,0.05],[0.0055,0.007,-0.01,0.01]], 0.062, &extra);
    let c = Coefficients { reluctivity: vec![Reluctivity::Constant(1.0/MU0),Reluctivity::Constant(1.0/MU0/500.0),Reluctivity::Constant(1.0/MU0)], current_density: vec![0.0,0.0, 80.0/(0.0015*0.02)] };
    let s = Solution { vertex: vec![0.0; mesh.points.len()], edge: vec![0.0; mesh.edges.len()] };
    let exact = 0.0003117175074332014;
    let r = rounds(mesh, c, s, &Rules::working(), &Accuracy { interval: 1e-5, n_unknowns_max: 200000 }, &mut |r| {
        eprintln!("{:7} {:?} {:.9e} {:.9e} low err {:.2e} high err {:.2e} ratio {:.2}", r.n_unknowns, r.effort, r.low, r.high, (exact-r.low)/exact, (r.high-exact)/exact, (r.high-r.low)/(exact-r.low));
    }).unwrap();
    let worst = (0..r.mesh.triangles.len()).map(|t| bound::defect(&r.mesh, &r.coefficients.current_density, &r.bound.flux, t).abs() / bound::scale(&r.mesh, &r.coefficients.current_density, &r.bound.flux, t).max(1e-300)).fold(0.0, f64::max);
    eprintln!("worst defect {worst:e}");
}
