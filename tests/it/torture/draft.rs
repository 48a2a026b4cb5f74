//! A sheet as data, so that it can be written at any size, mirrored, and to any accuracy.

use std::fmt::Write;

/// Keys of a core form and their lengths.
pub type Lengths = Vec<(&'static str, f64)>;

/// A law as the sheet states it.
#[derive(Debug, Clone, Copy)]
pub enum Law {
    Permeability(f64),
    /// Initial permeability, flux density [T].
    Saturation(f64, f64),
}

/// A winding: current [A], its sections as (turns, radii, heights).
#[derive(Debug, Clone)]
pub struct Coil {
    pub current: f64,
    pub sections: Vec<(f64, [f64; 2], [f64; 2])>,
}

/// A sheet; lengths in `unit`. Material k is called `m0`, `m1`, …
#[derive(Debug, Clone)]
pub struct Draft {
    pub unit: &'static str,
    pub laws: Vec<Law>,
    /// Material, form, dimensions by key.
    pub core: Option<(usize, &'static str, Lengths)>,
    /// Across, length, center.
    pub gaps: Vec<(&'static str, f64, f64)>,
    pub coils: Vec<Coil>,
    /// Material, corners [r, z, fillet].
    pub parts: Vec<(usize, Vec<[f64; 3]>)>,
    /// Wanted relative width.
    pub interval: f64,
}

/// A copy of a sheet: all lengths and currents times `factor` (the coenergy then grows with factor³), turned over or not.
#[derive(Debug, Clone, Copy)]
pub struct Copy {
    pub factor: f64,
    pub mirrored: bool,
    pub interval: f64,
}

impl Draft {
    /// An empty sheet in millimetres with one material, to 1 %.
    pub fn new(permeability: f64) -> Draft {
        Draft {
            unit: "mm",
            laws: vec![Law::Permeability(permeability)],
            core: None,
            gaps: vec![],
            coils: vec![],
            parts: vec![],
            interval: 0.01,
        }
    }

    /// With a core of material 0.
    pub fn core(mut self, form: &'static str, dimensions: &[(&'static str, f64)]) -> Draft {
        self.core = Some((0, form, dimensions.to_vec()));
        self
    }

    /// The pot core of the README, its post solid, with some dimensions replaced or added.
    pub fn pot(permeability: f64, changes: &[(&'static str, f64)]) -> Draft {
        let mut dimensions = vec![
            ("outer_diameter", 25.5),
            ("wall_inner_diameter", 21.2),
            ("post_diameter", 11.5),
            ("height", 16.1),
            ("window_height", 11.0),
        ];
        for &(key, value) in changes {
            dimensions.retain(|(known, _)| *known != key);
            dimensions.push((key, value));
        }
        Draft::new(permeability).core("pot", &dimensions)
    }

    /// With one more gap.
    pub fn gap(mut self, across: &'static str, length: f64, center: f64) -> Draft {
        self.gaps.push((across, length, center));
        self
    }

    /// With one more winding of 10 turns and 1 A in one section.
    pub fn coil(self, radii: [f64; 2], heights: [f64; 2]) -> Draft {
        self.sections(vec![(10.0, radii, heights)])
    }

    /// With one more winding of 1 A.
    pub fn sections(mut self, sections: Vec<(f64, [f64; 2], [f64; 2])>) -> Draft {
        self.coils.push(Coil { current: 1.0, sections });
        self
    }

    /// With one more part of material 0, sharp corners.
    pub fn part(self, corners: &[[f64; 2]]) -> Draft {
        let corners: Vec<[f64; 3]> = corners.iter().map(|&[r, z]| [r, z, 0.0]).collect();
        self.rounded(&corners)
    }

    /// With one more part of material 0, corners with fillets.
    pub fn rounded(mut self, corners: &[[f64; 3]]) -> Draft {
        self.parts.push((0, corners.to_vec()));
        self
    }

    /// The sheet itself.
    pub fn text(&self) -> String {
        self.copy(Copy { factor: 1.0, mirrored: false, interval: self.interval })
    }

    /// The text of a copy. Numbers are printed with all their digits.
    pub fn copy(&self, copy: Copy) -> String {
        let mut text = format!("length_unit = \"{}\"\n", self.unit);
        for (k, law) in self.laws.iter().enumerate() {
            let law = match law {
                Law::Permeability(permeability) => format!("permeability = {permeability:?}"),
                Law::Saturation(initial, b) => format!(
                    "saturation = {{ initial_permeability = {initial:?}, flux_density = {b:?} }}"
                ),
            };
            writeln!(text, "\n[materials.m{k}]\n{law}").unwrap();
        }
        self.write_core(copy, &mut text);
        self.write_coils(copy, &mut text);
        for (material, corners) in &self.parts {
            writeln!(text, "\n[[parts]]\nmaterial = \"m{material}\"\noutline = [").unwrap();
            for &[r, z, fillet] in corners {
                let (r, z, fillet) = (r * copy.factor, height(copy, z), fillet.abs() * copy.factor);
                match fillet {
                    0.0 => writeln!(text, "  [{r:?}, {z:?}],").unwrap(),
                    _ => writeln!(text, "  [{r:?}, {z:?}, {fillet:?}],").unwrap(),
                }
            }
            text.push_str("]\n");
        }
        writeln!(text, "\n[accuracy]\ninterval = {:?}", copy.interval).unwrap();
        // The hot spots' disc grows along, for the rounds refine to its size.
        writeln!(text, "\n[hot_spots]\naveraging = {:?}", 0.2 * copy.factor).unwrap();
        text
    }

    fn write_core(&self, copy: Copy, text: &mut String) {
        if let Some((material, form, dimensions)) = &self.core {
            writeln!(text, "\n[core]\nmaterial = \"m{material}\"\nform = \"{form}\"").unwrap();
            for (key, length) in dimensions {
                writeln!(text, "{key} = {:?}", length * copy.factor).unwrap();
            }
        }
        for &(across, length, center) in &self.gaps {
            let length = length * copy.factor;
            writeln!(text, "\n[[gaps]]\nacross = \"{across}\"\nlength = {length:?}").unwrap();
            if across != "spacer" {
                writeln!(text, "center = {:?}", height(copy, center)).unwrap();
            }
        }
    }

    fn write_coils(&self, copy: Copy, text: &mut String) {
        for coil in &self.coils {
            let current = coil.current * copy.factor;
            writeln!(text, "\n[[windings]]\ncurrent = {current:?}\nsections = [").unwrap();
            for &(turns, [r0, r1], [z0, z1]) in &coil.sections {
                let (r0, r1) = (r0 * copy.factor, r1 * copy.factor);
                let (z0, z1) = if copy.mirrored {
                    (height(copy, z1), height(copy, z0))
                } else {
                    (height(copy, z0), height(copy, z1))
                };
                writeln!(
                    text,
                    "  {{ turns = {turns:?}, radii = [{r0:?}, {r1:?}], heights = [{z0:?}, {z1:?}] }},"
                )
                .unwrap();
            }
            text.push_str("]\n");
        }
    }
}

fn height(copy: Copy, z: f64) -> f64 {
    // Adding 0 turns −0 into 0.
    if copy.mirrored { -z * copy.factor + 0.0 } else { z * copy.factor }
}
