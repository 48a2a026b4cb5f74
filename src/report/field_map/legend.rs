//! Beside and below the field map: colour scale, what the lines and rings mean, a bar of a plain length.

use super::{N_BANDS, TEXT, View, place_on_scale};
use crate::report::numbers::{decimals_for, millimeters, signed};
use crate::report::svg::{Anchor, Canvas, INK, Rect};
use crate::units::engineering;

/// What the legend explains.
pub(super) struct Key<'a> {
    /// |B| at the top of the scale [T].
    pub top: f64,
    pub colours: &'a [String],
    /// Step of 2πψ between flux lines [Wb].
    pub step: Option<f64>,
    pub has_windings: bool,
    pub has_hot_spots: bool,
}

/// Room for the legend [px].
pub(super) const WIDTH: f64 = 190.0;
/// Width of the colour bar and of the samples below it [px].
const BAR: f64 = 18.0;

/// Marks of the colour scale, as shares of its top.
const TICKS: [f64; 6] = [0.0, 0.02, 0.1, 0.25, 0.5, 1.0];

/// Three significant digits without trailing zeros.
fn plain_text(value: f64) -> String {
    let mut text = signed(value, decimals_for(value, 3));
    if text.contains('.') {
        text.truncate(text.trim_end_matches('0').trim_end_matches('.').len());
    }
    text
}

/// Draws the colour scale and the samples of lines and rings; returns the lower edge [px].
pub(super) fn legend(canvas: &mut Canvas, frame: &Rect, key: &Key) -> f64 {
    let x = frame.x + frame.width + 22.0;
    let scale_bottom = colour_bar(canvas, x, frame, key);
    let mut y = scale_bottom + 26.0;
    let text_at = x + BAR + 9.0;
    if let Some(step) = key.step {
        canvas.line([x, y - 4.0], [x + BAR, y - 4.0], &super::flux_style());
        let flux = format!("{} of flux", engineering(step, "Wb", 2));
        canvas.text([text_at, y], TEXT, Anchor::Start, "", &flux);
        canvas.text([text_at, y + 15.0], TEXT, Anchor::Start, "", "from line to line");
        y += 36.0;
    }
    if key.has_windings {
        canvas.line([x, y - 4.0], [x + BAR, y - 4.0], &super::winding_style());
        canvas.text([text_at, y], TEXT, Anchor::Start, "", "winding");
        y += 21.0;
    }
    if key.has_hot_spots {
        super::marks::ring(canvas, [x + 0.5 * BAR, y - 4.0]);
        canvas.text([text_at, y], TEXT, Anchor::Start, "", "hot spot (average)");
        y += 21.0;
    }
    y - 17.0
}

/// Draws the colour bar with its marks; returns its lower edge [px].
fn colour_bar(canvas: &mut Canvas, x: f64, frame: &Rect, key: &Key) -> f64 {
    let height = (0.6 * frame.height).clamp(160.0, 320.0);
    let y = frame.y + 22.0;
    let (unit, factor) = if key.top < 0.1e-3 {
        ("µT", 1e6)
    } else if key.top < 1.0 {
        ("mT", 1e3)
    } else {
        ("T", 1.0)
    };
    canvas.text([x, frame.y + 9.0], TEXT, Anchor::Start, "", &format!("|B| in {unit}"));
    let cell = height / N_BANDS as f64;
    for (band, colour) in key.colours.iter().enumerate() {
        let y = y + height - cell * (band + 1) as f64;
        // Each cell reaches a little under the next one, so that no seam shows.
        let reach = if band == 0 { 0.0 } else { 0.6 };
        let rect = Rect { x, y, width: BAR, height: cell + reach };
        canvas.rect(&rect, &format!("fill=\"{colour}\""));
    }
    let ink = format!("stroke=\"{INK}\" stroke-width=\"0.8\"");
    canvas.rect(&Rect { x, y, width: BAR, height }, &format!("fill=\"none\" {ink}"));
    for share in TICKS {
        let y = y + height * (1.0 - place_on_scale(share, 1.0));
        canvas.line([x + BAR, y], [x + BAR + 5.0, y], &ink);
        let more = if share == 1.0 { " and more" } else { "" };
        let text = format!("{}{more}", plain_text(factor * key.top * share));
        canvas.text([x + BAR + 9.0, y + 4.0], TEXT, Anchor::Start, "", &text);
    }
    y + height
}

/// Draws a bar of a plain length below the picture; returns the lower edge [px].
pub(super) fn ruler(canvas: &mut Canvas, view: &View, frame: &Rect) -> f64 {
    let y = frame.y + frame.height + 16.0;
    let length = ruler_length(0.2 * (view.z_top - view.z_bottom));
    let end = frame.x + view.scale * length;
    canvas.line([frame.x, y], [end, y], &format!("stroke=\"{INK}\" stroke-width=\"2\""));
    canvas.text(
        [end + 7.0, y + 4.0],
        TEXT,
        Anchor::Start,
        "",
        &format!("{} mm", millimeters(length)),
    );
    y + 8.0
}

/// The largest of 1, 2, 5 times a power of ten that is not above `room`.
fn ruler_length(room: f64) -> f64 {
    let decade = 10f64.powf(room.log10().floor());
    decade * [5.0, 2.0, 1.0].into_iter().find(|s| s * decade <= room * (1.0 + 1e-9)).unwrap_or(1.0)
}
