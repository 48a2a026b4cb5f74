//! `[materials.NAME]` → [`Material`], inline B–H pairs included; tables in files are read by `bh_file`.

use super::bh_file;
use super::bounds::{Bound, Kind};
use super::keys;
use super::nearest::nearest;
use super::values::{is_harmful, list_words};
use super::walk::{Fields, ITEMS_MAX, Reader, kind_of};
use crate::model::{BhTable, Interpolation, Law, Material, MaterialId, Subject};
use crate::units::Dimension;
use toml::Spanned;
use toml::de::DeValue;

const LAWS: [&str; 3] = ["permeability", "bh", "saturation"];

impl<'a> Reader<'a> {
    /// All materials, in the order of the sheet.
    pub fn materials(&mut self, top: &Fields<'a>) -> Vec<Material> {
        let Some(value) = top.get("materials") else { return Vec::new() };
        let DeValue::Table(entries) = value.get_ref() else {
            let message =
                format!("`materials` must hold tables, but it is {}", kind_of(value.get_ref()));
            self.fault(value.span(), message, "write `[materials.soft_ferrite]`, its keys below");
            return Vec::new();
        };
        let mut named: Vec<_> = entries.iter().collect();
        named.sort_by_key(|(name, _)| name.span().start);
        if ITEMS_MAX < named.len() {
            let message = format!("{} materials, where at most {ITEMS_MAX} are read", named.len());
            self.fault(value.span(), message, "leave out those that no part is made of");
            return Vec::new();
        }
        let mut materials = Vec::new();
        for (name, value) in named {
            let DeValue::Table(entries) = value.get_ref() else {
                let message = format!("`{}` stands in `[materials]` itself", name.get_ref());
                self.fault(
                    name.span(),
                    message,
                    "give the material a name: `[materials.soft_ferrite]`, its keys below",
                );
                continue;
            };
            let fields = self.fields(entries, value.span(), &keys::MATERIAL);
            self.remember(Subject::Material(materials.len()), &fields);
            self.material_name(name);
            let law = self.law(&fields, name.get_ref());
            materials.push(Material { name: name.get_ref().to_string(), law });
        }
        materials
    }

    fn material_name(&mut self, name: &Spanned<std::borrow::Cow<'a, str>>) {
        if name.get_ref().trim().is_empty() || name.get_ref().chars().any(is_harmful) {
            self.fault(
                name.span(),
                "a material's name is empty or holds a control character",
                "write `[materials.soft_ferrite]`",
            );
        }
    }

    fn law(&mut self, fields: &Fields<'a>, name: &str) -> Law {
        const PLACEHOLDER: Law = Law::Constant { permeability: 1.0 };
        let given: Vec<&str> = LAWS.into_iter().filter(|key| fields.has(key)).collect();
        if fields.has("interpolation") && !fields.has("bh") {
            self.fault(
                fields.span("interpolation"),
                "`interpolation` is given, but there is no `bh` table",
                "remove it",
            );
        }
        match given[..] {
            ["bh"] => self.bh(fields, name).unwrap_or(PLACEHOLDER),
            ["saturation"] => self.saturation(fields).unwrap_or(PLACEHOLDER),
            [_permeability] => {
                let permeability = self.number(fields, "permeability", Kind::Pure, Bound::Positive);
                Law::Constant { permeability }
            }
            [] => {
                let message = format!("material `{name}` has no law");
                self.fault(
                    fields.header_span(),
                    message,
                    "add one of `permeability = 2000`, `bh = \"table.csv\"`, `saturation = { … }`",
                );
                PLACEHOLDER
            }
            [first, second, ..] => {
                let message = format!("material `{name}` has two laws, `{first}` and `{second}`");
                let also = (fields.span(first), "one law");
                self.fault_pair(fields.span(second), also, message, "keep one of them");
                PLACEHOLDER
            }
        }
    }

    fn saturation(&mut self, fields: &Fields<'a>) -> Option<Law> {
        let value = fields.get("saturation")?;
        let DeValue::Table(entries) = value.get_ref() else {
            let message =
                format!("`saturation` must be a table, but it is {}", kind_of(value.get_ref()));
            self.fault(
                value.span(),
                message,
                "write `saturation = { initial_permeability = 2300, flux_density = \"0.48 T\" }`",
            );
            return None;
        };
        let inner = self.fields(entries, value.span(), &keys::SATURATION);
        let initial = self.number(&inner, "initial_permeability", Kind::Pure, Bound::Positive);
        let flux =
            self.number(&inner, "flux_density", Kind::Of(Dimension::FluxDensity), Bound::Positive);
        if initial.is_nan() || flux.is_nan() {
            return None;
        }
        Law::saturation(initial, flux)
            .map_err(|error| {
                let (message, help) = bh_file::message_and_help(&error);
                self.fault(value.span(), message, help);
            })
            .ok()
    }

    fn bh(&mut self, fields: &Fields<'a>, name: &str) -> Option<Law> {
        let words = [("smooth", Interpolation::Smooth), ("linear", Interpolation::Linear)];
        let interpolation =
            self.choice(fields, "interpolation", &words).unwrap_or(Interpolation::Smooth);
        let value = fields.get("bh")?;
        match value.get_ref() {
            DeValue::String(_) => {
                let path = &self.text(fields, "bh")?;
                let text = match (self.read_file)(path) {
                    Ok(text) => text,
                    Err(reason) => {
                        let message = format!(
                            "the B–H table `{}` of material `{name}` cannot be read: {reason}",
                            path.escape_default()
                        );
                        self.fault(value.span(), message, "write the path relative to this sheet");
                        return None;
                    }
                };
                match bh_file::law(&text, &bh_file::beside(self.name, path), interpolation) {
                    Ok(law) => Some(law),
                    Err(diagnostic) => {
                        self.diagnostics.push(diagnostic);
                        None
                    }
                }
            }
            DeValue::Array(rows) => self.bh_pairs(value, rows, interpolation),
            other => {
                let message = format!(
                    "`bh` must be the path of a CSV file or a list of pairs, but it is {}",
                    kind_of(other)
                );
                self.fault(
                    value.span(),
                    message,
                    "write `bh = \"table.csv\"` or `bh = [[0, 0], [50, 0.1], …]`",
                );
                None
            }
        }
    }

    fn bh_pairs(
        &mut self,
        value: &Spanned<DeValue<'a>>,
        rows: &[Spanned<DeValue<'a>>],
        interpolation: Interpolation,
    ) -> Option<Law> {
        let (mut h, mut b) = (Vec::new(), Vec::new());
        let n_before = self.diagnostics.len();
        for row in rows {
            match row.get_ref() {
                DeValue::Array(pair) if pair.len() == 2 => {
                    h.push(self.number_at(
                        "bh",
                        &pair[0],
                        Kind::Of(Dimension::FieldStrength),
                        Bound::Any,
                    ));
                    b.push(self.number_at(
                        "bh",
                        &pair[1],
                        Kind::Of(Dimension::FluxDensity),
                        Bound::Any,
                    ));
                }
                other => {
                    let message =
                        format!("`bh` must hold pairs [H, B], but here is {}", list_words(other));
                    self.fault(row.span(), message, "write H in A/m and B in T: [50, 0.1]");
                }
            }
        }
        if n_before < self.diagnostics.len() {
            return None;
        }
        BhTable::new(h, b, interpolation)
            .map(Law::Table)
            .map_err(|error| {
                let span = error.row().and_then(|row| rows.get(row - 1)).unwrap_or(value).span();
                let (message, help) = bh_file::message_and_help(&error);
                self.fault(span, format!("`bh`: {message}"), help);
            })
            .ok()
    }

    /// The material that `key` names.
    pub fn material_of(&mut self, fields: &Fields<'a>, materials: &[Material]) -> MaterialId {
        self.must(fields, "material");
        let Some(name) = self.text(fields, "material") else { return MaterialId(0) };
        if let Some(index) = materials.iter().position(|m| m.name == name) {
            return MaterialId(index as u16);
        }
        let (message, help) = unknown_material(&name, materials);
        self.fault(fields.span("material"), message, help);
        MaterialId(0)
    }
}

/// Message and help for a material that is not defined.
pub(super) fn unknown_material(name: &str, materials: &[Material]) -> (String, String) {
    let known: Vec<&str> = materials.iter().map(|m| m.name.as_str()).collect();
    let help = match nearest(name, &known) {
        Some(near) => format!("the nearest is `{near}`; defined here: {}", known.join(", ")),
        None => "define it: `[materials.soft_ferrite]`, with `permeability = 2000` below".into(),
    };
    (format!("material `{name}` is not defined"), help)
}
