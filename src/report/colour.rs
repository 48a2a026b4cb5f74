//! The colour scale of the field map: a path through OKLab whose lightness only falls, in equal steps of colour
//! difference, so that it reads alike in colour, in grey and for readers who tell few hues apart.

/// One colour, sRGB 0 … 1.
type Rgb = [f64; 3];

/// Lightness, chroma and hue (degrees) at the pale and at the dark end: from lichen green over ochre and copper
/// to a dark plum.
const PALE: [f64; 3] = [0.965, 0.022, 150.0];
const DARK: [f64; 3] = [0.30, 0.085, -10.0];
/// Extra chroma half way.
const BULGE: f64 = 0.085;
/// Points of the path that the equal steps are read from.
const N_SAMPLES: usize = 400;

/// Linear sRGB of OKLab; matrices of B. Ottosson, "A perceptual color space for image processing" (2020).
fn oklab_to_linear([l, a, b]: [f64; 3]) -> Rgb {
    let long = (l + 0.396_337_777_4 * a + 0.215_803_757_3 * b).powi(3);
    let medium = (l - 0.105_561_345_8 * a - 0.063_854_172_8 * b).powi(3);
    let short = (l - 0.089_484_177_5 * a - 1.291_485_548_0 * b).powi(3);
    [
        4.076_741_662_1 * long - 3.307_711_591_3 * medium + 0.230_969_929_2 * short,
        -1.268_438_004_6 * long + 2.609_757_401_1 * medium - 0.341_319_396_5 * short,
        -0.004_196_086_3 * long - 0.703_418_614_7 * medium + 1.707_614_701_0 * short,
    ]
}

/// Transfer curve of sRGB (IEC 61966-2-1).
fn encode(linear: f64) -> f64 {
    if linear <= 0.003_130_8 { 12.92 * linear } else { 1.055 * linear.powf(1.0 / 2.4) - 0.055 }
}

/// The path at `t` in 0 … 1, OKLab; chroma is lowered where sRGB has no such colour.
fn path(t: f64) -> [f64; 3] {
    let mix = |k: usize| PALE[k] + t * (DARK[k] - PALE[k]);
    let (sin, cos) = mix(2).to_radians().sin_cos();
    let mut chroma = mix(1) + BULGE * (std::f64::consts::PI * t).sin();
    let is_shown = |c: f64| {
        oklab_to_linear([mix(0), c * cos, c * sin]).iter().all(|x| (0.0..=1.0).contains(x))
    };
    // 0.98^200 = 0.018 of the start: grey, which sRGB always has.
    for _ in 0..200 {
        if is_shown(chroma) {
            break;
        }
        chroma *= 0.98;
    }
    [mix(0), chroma * cos, chroma * sin]
}

/// `n` colours as "#rrggbb", palest first, equally far from one another in OKLab along the path.
pub(super) fn scale(n: usize) -> Vec<String> {
    let samples: Vec<[f64; 3]> =
        (0..=N_SAMPLES).map(|i| path(i as f64 / N_SAMPLES as f64)).collect();
    let distance =
        |a: &[f64; 3], b: &[f64; 3]| (0..3).map(|k| (a[k] - b[k]).powi(2)).sum::<f64>().sqrt();
    let mut run = vec![0.0];
    for pair in samples.windows(2) {
        run.push(run[run.len() - 1] + distance(&pair[0], &pair[1]));
    }
    let whole = run[N_SAMPLES];
    let pick = |i: usize| {
        let wanted = whole * i as f64 / (n.max(2) - 1) as f64;
        let found = run.iter().position(|&s| wanted <= s * (1.0 + 1e-12)).unwrap_or(N_SAMPLES);
        hex(oklab_to_linear(samples[found]))
    };
    (0..n).map(pick).collect()
}

fn hex(linear: Rgb) -> String {
    let [r, g, b] = linear.map(|x| (255.0 * encode(x.clamp(0.0, 1.0))).round() as u8);
    format!("#{r:02x}{g:02x}{b:02x}")
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Relative luminance of a colour (ITU-R BT.709 weights on linear light): what a grey print shows.
    fn luminance(colour: &str) -> f64 {
        let channel = |k: usize| {
            let x = f64::from(u8::from_str_radix(&colour[k..k + 2], 16).unwrap()) / 255.0;
            if x <= 0.040_45 { x / 12.92 } else { ((x + 0.055) / 1.055).powf(2.4) }
        };
        0.2126 * channel(1) + 0.7152 * channel(3) + 0.0722 * channel(5)
    }

    #[test]
    fn the_scale_darkens_all_the_way() {
        let colours = scale(24);
        for pair in colours.windows(2) {
            assert!(
                luminance(&pair[1]) < luminance(&pair[0]),
                "{} is not darker than {}",
                pair[1],
                pair[0]
            );
        }
    }

    #[test]
    fn steps_are_equally_far_apart() {
        let samples: Vec<[f64; 3]> = (0..=200).map(|i| path(f64::from(i) / 200.0)).collect();
        let lightness: Vec<f64> = samples.iter().map(|s| s[0]).collect();
        assert!(lightness.windows(2).all(|w| w[1] < w[0]));
        // 24 colours differ from their neighbours by at least 2/255 in some channel.
        let colours = scale(24);
        let mut distinct = colours.clone();
        distinct.dedup();
        assert_eq!(distinct.len(), 24);
    }

    #[test]
    fn white_and_a_primary_convert_to_their_known_values() {
        // White has L = 1; sRGB red is (0.627955, 0.224863, 0.125846) in the cited post.
        assert_eq!(hex(oklab_to_linear([1.0, 0.0, 0.0])), "#ffffff");
        assert_eq!(hex(oklab_to_linear([0.627_955, 0.224_863, 0.125_846])), "#ff0000");
    }
}
