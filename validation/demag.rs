//! Demagnetising factors: closed forms of spheroids, and the published factors of cylinders as data.
//!
//! The cylinder rows are outside data for whoever computes a rod in a uniform field; here only their identities are
//! checked (definitions and the limit of small susceptibility).

/// Demagnetising factor along the long axis of a prolate spheroid of aspect `m` > 1.
///
/// Source: J. A. Osborn, Phys. Rev. 67 (1945) 351.
pub fn prolate(m: f64) -> f64 {
    let root = (m * m - 1.0).sqrt();
    (m / (2.0 * root) * ((m + root) / (m - root)).ln() - 1.0) / (m * m - 1.0)
}

/// Demagnetising factor along the short axis of an oblate spheroid of aspect `m` > 1.
///
/// Source: J. A. Osborn, Phys. Rev. 67 (1945) 351.
pub fn oblate(m: f64) -> f64 {
    let root = (m * m - 1.0).sqrt();
    m * m / (m * m - 1.0) * (1.0 - (root / m).asin() / root)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::elliptic::nagaoka;
    use crate::references::{all_published, published};

    #[test]
    fn spheroids_agree_with_osborn() {
        for row in all_published("SPHEROID", 6) {
            // The prolate form loses log10(m²) digits by cancellation.
            row.agrees("prolate", prolate(row.input("m")), 1e-10);
            row.agrees("oblate", oblate(row.input("m")), 1e-12);
        }
    }

    #[test]
    fn spheroids_meet_the_sphere() {
        let m = 1.001;
        // 1/3 ∓ (4/15)(m − 1) near the sphere.
        assert!((prolate(m) - (1.0 / 3.0 - 4.0 / 15.0 * (m - 1.0))).abs() < 1e-6);
        assert!((oblate(m) - (1.0 / 3.0 + 4.0 / 15.0 * (m - 1.0))).abs() < 1e-6);
    }

    #[test]
    fn cylinder_rows_obey_their_definitions() {
        let rows: Vec<_> =
            published("CYL-gamma").into_iter().filter(|r| r.input("mu_r").is_finite()).collect();
        assert!(rows.len() >= 20);
        for row in rows {
            let chi = row.input("mu_r") - 1.0;
            // µ_app = 1 + M/H_a at the middle. (The other form in the row's text, µ/(1 + N_f (µ − 1)), is not the same.)
            row.agrees("mu_app_mid", 1.0 + 1.0 / (row.value("Nf") + 1.0 / chi), 1e-9);
            row.agrees("Mavg_over_Ha", 1.0 / (row.value("Nm") + 1.0 / chi), 1e-9);
        }
    }

    #[test]
    fn weakly_magnetic_cylinders_follow_nagaoka() {
        // χ → 0: N_m = 1 − K, the complement of the solenoid's coefficient, here with length = diameter.
        let [row] = &published("CYL-CHI0")[..] else { panic!("one row expected") };
        row.agrees("", 1.0 - nagaoka(0.5, 1.0), 1e-10);
    }
}
