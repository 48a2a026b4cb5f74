//! scratch runner
fn main() {
    let path = std::env::args().nth(1).unwrap();
    let width: f64 = std::env::args().nth(2).map_or(1e-3, |s| s.parse().unwrap());
    let exact: f64 = std::env::args().nth(3).map_or(f64::NAN, |s| s.parse().unwrap());
    let text = std::fs::read_to_string(&path).unwrap();
    let sheet = match gapwright::input::read(&text, &path, &|p| {
        std::fs::read_to_string(std::path::Path::new(&path).with_file_name(p)).map_err(|e| e.to_string())
    }) {
        Ok(s) => s,
        Err(d) => {
            for d in d {
                eprintln!("{}", gapwright::input::render(&d, &text, false));
            }
            return;
        }
    };
    let mut model = sheet.model.clone();
    model.accuracy.interval = width;
    model.accuracy.n_unknowns_max = 2_000_000;
    let t0 = std::time::Instant::now();
    let outline = match gapwright::geometry::outline(&model) {
        Ok(o) => o,
        Err(f) => {
            eprintln!("{f:?}");
            return;
        }
    };
    let t1 = std::time::Instant::now();
    let o = gapwright::adapt::run(&model, &outline, &mut |r| {
        println!(
            "{:7} cg {:3} nw {:2} {:.9e} {:.9e} low err {:.2e} high err {:.2e} ratio {:.2}  {:?}",
            r.n_unknowns,
            r.effort.n_cg_iterations,
            r.effort.n_newton_steps,
            r.low,
            r.high,
            (exact - r.low) / exact,
            (r.high - exact) / exact,
            (r.high - r.low) / (exact - r.low),
            t1.elapsed()
        );
    })
    .unwrap();
    println!(
        "outline {:?} run {:?} reached {} tri {}",
        t1 - t0,
        t1.elapsed(),
        o.reached,
        o.mesh.n_triangles()
    );
    let t2 = std::time::Instant::now();
    let r = gapwright::results::collect(&model, &outline, &o);
    println!("collect {:?}", t2.elapsed());
    if std::env::args().nth(4).is_some() {
        println!("{r:#?}");
    }
}
