//! gapwright: the magnetic field of round cores and coils, with a guaranteed interval of the inductance.
//!
//! `input` → `model` → `geometry` → `mesh` → `adapt` (`fem`, `solve`, `bound`) → `results` → `report`.
//!
//! Every stage takes plain values and returns plain values, in SI. From a sheet's text to an inductance with its interval:
//!
//! ```
//! use gapwright::{adapt, geometry, input, results};
//!
//! let text = r#"
//! [[windings]]
//! turns   = 100
//! radii   = [20, 30]
//! heights = [-5, 5]
//! "#;
//! // The last argument fetches B-H tables that a sheet names; this one names none.
//! let sheet = input::read(text, "coil.toml", &|path| Err(format!("{path}: no such file")));
//! let mut model = match sheet {
//!     Ok(sheet) => sheet.model,
//!     Err(mistakes) => panic!("{}", input::render(&mistakes[0], text, false)),
//! };
//! model.accuracy.interval = 1e-3;
//!
//! let outline = geometry::outline(&model)?;
//! let outcome = adapt::run(&model, &outline, &mut |_progress| {})?;
//! let found = results::collect(&model, &outline, &outcome);
//!
//! // 573.8607 µH by an independent high-order program.
//! let inductance = found.inductance.ok_or("several windings carry current")?;
//! assert!(found.reached && inductance.low <= 573.8607e-6 && 573.8607e-6 <= inductance.high);
//! # Ok::<(), Box<dyn std::error::Error>>(())
//! ```
//!
//! `results::check_requirements` and `results::ripple` solve the same mesh at other currents; `study::saturate` makes
//! the table of inductance against current; `report` turns all of them into text, JSON, CSV, VTK and SVG.

pub mod adapt;
pub mod bound;
pub mod fem;
pub mod geometry;
pub mod input;
pub mod mesh;
pub mod model;
pub mod report;
pub mod results;
pub mod solve;
pub mod sparse;
pub mod study;
pub mod units;
