//! `[core]`, `[[gaps]]` and `[[parts]]` → the magnetic body.

use super::bounds::{Bound, Kind, LENGTH};
use super::keys;
use super::values::list_words;
use super::walk::{Fields, Reader};
use crate::model::{Across, Core, Corner, Form, Gap, Material, Part, Point, PotWall, Subject};
use crate::units::Dimension;
use toml::Spanned;
use toml::de::DeValue;

/// A form, before its dimensions are read.
#[derive(Clone, Copy, PartialEq)]
enum FormName {
    Pot,
    Drum,
    Rod,
}

const FORMS: [(&str, FormName); 3] =
    [("pot", FormName::Pot), ("drum", FormName::Drum), ("rod", FormName::Rod)];
const RINGS: [&str; 4] = ["ring", "toroid", "toroidal", "torus"];
const COMMON_KEYS: [&str; 4] = ["material", "form", "corner_radius", "joint"];

fn keys_of(form: FormName) -> (&'static str, &'static [&'static str]) {
    match form {
        FormName::Pot => (
            "pot",
            &[
                "outer_diameter",
                "outer_legs_area",
                "wall_inner_diameter",
                "post_diameter",
                "hole_diameter",
                "height",
                "window_height",
            ],
        ),
        FormName::Drum => (
            "drum",
            &["flange_diameter", "post_diameter", "hole_diameter", "height", "window_height"],
        ),
        FormName::Rod => ("rod", &["diameter", "hole_diameter", "height"]),
    }
}

impl<'a> Reader<'a> {
    /// `[core]`; `None` without one, or when its form is not usable.
    pub fn core(&mut self, top: &Fields<'a>, materials: &[Material]) -> Option<Core> {
        let fields = self.table(top, "core", &keys::CORE)?;
        self.remember(Subject::Core, &fields);
        let material = self.material_of(&fields, materials);
        let form = self.form_name(&fields)?;
        self.foreign_keys(&fields, form);
        let form = match form {
            FormName::Pot => self.pot(&fields),
            FormName::Drum => self.drum(&fields),
            FormName::Rod => self.rod(&fields),
        };
        let corner_radius = self.length_or_zero(&fields, "corner_radius");
        let joint = self.length_or_zero(&fields, "joint");
        if matches!(form, Form::Rod { .. }) && 0.0 < corner_radius {
            let message = "`corner_radius` rounds the corners of a window, and a rod has none";
            self.fault(
                fields.span("corner_radius"),
                message,
                "remove it, or draw the rod in `[[parts]]` with fillets",
            );
        }
        Some(Core { material, form, corner_radius, joint })
    }

    fn form_name(&mut self, fields: &Fields<'a>) -> Option<FormName> {
        let value = self.must(fields, "form")?;
        if let DeValue::String(word) = value.get_ref()
            && RINGS.contains(&word.trim().to_lowercase().as_str())
        {
            let message = format!(
                "form = \"{}\": a ring core carries its flux around the axis, and this program solves flux in the (r, z) plane",
                word.trim()
            );
            let help = "sum it by hand, L = µ0 µr N² h ln(r2/r1)/2π; the forms solved here are \"pot\", \"drum\" and \"rod\"";
            self.fault(value.span(), message, help);
            return None;
        }
        self.choice(fields, "form", &FORMS)
    }

    /// Notes keys that another form has.
    fn foreign_keys(&mut self, fields: &Fields<'a>, form: FormName) {
        let (name, own) = keys_of(form);
        for key in keys::CORE.keys {
            if fields.has(key) && !own.contains(key) && !COMMON_KEYS.contains(key) {
                let help = format!("remove it; a {name} has {}", own.join(", "));
                self.fault(
                    fields.span(key),
                    format!("`{key}` is no dimension of form = \"{name}\""),
                    help,
                );
            }
        }
    }

    fn pot(&mut self, fields: &Fields<'a>) -> Form {
        let wall = self.pot_wall(fields);
        let wall_inner_diameter = self.length(fields, "wall_inner_diameter");
        let [post_diameter, hole_diameter] = self.post(fields, "post_diameter");
        let [height, window_height] = self.heights(fields);
        let inner = ("wall_inner_diameter", wall_inner_diameter);
        if let PotWall::OuterDiameter(outer) = wall {
            self.ascending(fields, inner, ("outer_diameter", outer));
        }
        self.ascending(fields, ("post_diameter", post_diameter), inner);
        Form::Pot { wall, wall_inner_diameter, post_diameter, hole_diameter, height, window_height }
    }

    fn pot_wall(&mut self, fields: &Fields<'a>) -> PotWall {
        match (fields.has("outer_diameter"), fields.has("outer_legs_area")) {
            (true, true) => {
                let also = (fields.span("outer_diameter"), "one statement of the wall");
                let message =
                    "the wall is given twice, by `outer_diameter` and by `outer_legs_area`";
                self.fault_pair(
                    fields.span("outer_legs_area"),
                    also,
                    message,
                    "keep the one that the drawing has: legs that are not round have an area",
                );
                PotWall::OuterDiameter(f64::NAN)
            }
            (false, true) => {
                let kind = Kind::Of(Dimension::Area);
                PotWall::OuterLegsArea(self.number(
                    fields,
                    "outer_legs_area",
                    kind,
                    Bound::Positive,
                ))
            }
            (true, false) => PotWall::OuterDiameter(self.length(fields, "outer_diameter")),
            (false, false)
                if ["outer_diameter", "outer_legs_area"]
                    .iter()
                    .any(|key| fields.has_misspelled(key)) =>
            {
                PotWall::OuterDiameter(f64::NAN)
            }
            (false, false) => {
                let help = "add `outer_diameter = 25.5`, or `outer_legs_area = \"95 mm²\"` for legs that are not round";
                self.fault(
                    fields.header_span(),
                    "`[core]` lacks `outer_diameter` or `outer_legs_area`",
                    help,
                );
                PotWall::OuterDiameter(f64::NAN)
            }
        }
    }

    fn drum(&mut self, fields: &Fields<'a>) -> Form {
        let flange_diameter = self.length(fields, "flange_diameter");
        let [post_diameter, hole_diameter] = self.post(fields, "post_diameter");
        let [height, window_height] = self.heights(fields);
        let flange = ("flange_diameter", flange_diameter);
        self.ascending(fields, ("post_diameter", post_diameter), flange);
        Form::Drum { flange_diameter, post_diameter, hole_diameter, height, window_height }
    }

    fn rod(&mut self, fields: &Fields<'a>) -> Form {
        let [diameter, hole_diameter] = self.post(fields, "diameter");
        Form::Rod { diameter, hole_diameter, height: self.length(fields, "height") }
    }

    /// Outer and hole diameter of the post.
    fn post(&mut self, fields: &Fields<'a>, key: &'static str) -> [f64; 2] {
        let outer = self.length(fields, key);
        let hole = self.length_or_zero(fields, "hole_diameter");
        self.ascending(fields, ("hole_diameter", hole), (key, outer));
        [outer, hole]
    }

    fn heights(&mut self, fields: &Fields<'a>) -> [f64; 2] {
        let height = self.length(fields, "height");
        let window = self.length(fields, "window_height");
        self.ascending(fields, ("window_height", window), ("height", height));
        [height, window]
    }

    /// Notes two dimensions of which the first must be the smaller; NaN was noted before.
    fn ascending(&mut self, fields: &Fields<'a>, smaller: (&str, f64), larger: (&str, f64)) {
        if larger.1 <= smaller.1 {
            let [small, large] = [smaller.0, larger.0].map(|key| fields.span(key));
            let message = format!(
                "`{}` = {} is not smaller than `{}` = {}",
                smaller.0,
                self.written(&small),
                larger.0,
                self.written(&large)
            );
            let also = (large, "must be the larger");
            self.fault_pair(small, also, message, "look both up in the drawing again");
        }
    }

    /// All gaps; `core` tells whether there is a core, and of which form.
    pub fn gaps(&mut self, top: &Fields<'a>, core: Option<&Core>) -> Vec<Gap> {
        let has_core = top.has("core") || top.has_misspelled("core");
        let mut gaps = Vec::new();
        for fields in self.list(top, "gaps", &keys::GAP) {
            let index = gaps.len();
            self.remember(Subject::Gap(index), &fields);
            if !has_core {
                let help = "add a `[core]`, or remove the gap; between `[[parts]]` a gap is the room that the outlines leave";
                self.fault(fields.header_span(), "a gap without a `[core]` to grind it into", help);
            }
            let name = self.text(&fields, "name").unwrap_or(format!("gap {}", index + 1));
            let across = self.across(&fields, core);
            let length = self.length(&fields, "length");
            let center = self.number_or(&fields, "center", LENGTH, Bound::Any, 0.0);
            if across == Across::Spacer && fields.has("center") {
                let message =
                    "`center` is given for a spacer, which moves the halves apart in the middle";
                self.fault(
                    fields.span("center"),
                    message,
                    "remove `center`, or write across = \"post\" for a ground gap",
                );
            }
            gaps.push(Gap { name, across, length, center });
        }
        self.distinct_names("gap", gaps.iter().map(|gap| gap.name.as_str()), Subject::Gap);
        gaps
    }

    fn across(&mut self, fields: &Fields<'a>, core: Option<&Core>) -> Across {
        self.must(fields, "across");
        let words = [("post", Across::Post), ("wall", Across::Wall), ("spacer", Across::Spacer)];
        let across = self.choice(fields, "across", &words).unwrap_or(Across::Post);
        let form = match core.map(|core| core.form) {
            Some(Form::Drum { .. }) => "drum",
            Some(Form::Rod { .. }) => "rod",
            _ => return across,
        };
        if across == Across::Wall {
            let message = format!("a gap across the wall, but form = \"{form}\" has no wall");
            self.fault(fields.span("across"), message, "write across = \"post\"");
        }
        across
    }

    /// All polygonal parts.
    pub fn parts(&mut self, top: &Fields<'a>, materials: &[Material]) -> Vec<Part> {
        let mut parts = Vec::new();
        for fields in self.list(top, "parts", &keys::PART) {
            let index = parts.len();
            self.remember(Subject::Part(index), &fields);
            let name = self.text(&fields, "name").unwrap_or(format!("part {}", index + 1));
            let material = self.material_of(&fields, materials);
            let outline = self.outline(&fields);
            parts.push(Part { name, material, outline });
        }
        self.distinct_names("part", parts.iter().map(|part| part.name.as_str()), Subject::Part);
        parts
    }

    fn outline(&mut self, fields: &Fields<'a>) -> Vec<Corner> {
        let Some(value) = self.must(fields, "outline") else { return Vec::new() };
        let help = "write three corners or more, such as [[0, 0], [5, 0], [5, 2, 0.5]]";
        let corners = match value.get_ref() {
            DeValue::Array(corners) if 3 <= corners.len() => corners,
            other => {
                let message = format!(
                    "`outline` must be a list of three corners or more, but it is {}",
                    list_words(other)
                );
                self.fault(value.span(), message, help);
                return Vec::new();
            }
        };
        corners.iter().map(|corner| self.corner(corner)).collect()
    }

    fn corner(&mut self, value: &Spanned<DeValue<'a>>) -> Corner {
        let items = match value.get_ref() {
            DeValue::Array(items) if (2..=3).contains(&items.len()) => items,
            other => {
                let message = format!(
                    "`outline` must hold corners [r, z] or [r, z, fillet], but here is {}",
                    list_words(other)
                );
                self.fault(
                    value.span(),
                    message,
                    "write radius, height and, for a rounded corner, the fillet's radius",
                );
                return Corner { at: Point::default(), fillet_radius: 0.0 };
            }
        };
        let at = Point {
            r: self.number_at("outline", &items[0], LENGTH, Bound::NotNegative),
            z: self.number_at("outline", &items[1], LENGTH, Bound::Any),
        };
        let fillet =
            items.get(2).map(|item| self.number_at("outline", item, LENGTH, Bound::NotNegative));
        Corner { at, fillet_radius: fillet.unwrap_or(0.0) }
    }
}
