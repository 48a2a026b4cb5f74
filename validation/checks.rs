//! The table: which rows it has, and that they hold.

mod coils;
mod cylinders;
mod facts;
mod fields;
mod fields_at_points;
mod hand;
mod left_out;
mod spheres;
mod walls;

use crate::coils::Coil;
use crate::table::Row;

/// Every row, in the table's order.
pub fn rows() -> Vec<Row> {
    [
        fields::rows(),
        coils::rows(),
        walls::rows(),
        spheres::rows(),
        fields_at_points::rows(),
        cylinders::rows(),
        hand::rows(),
        facts::rows(),
        facts::random_coils(),
    ]
    .concat()
}

/// A coil with its middle at z = 0.
fn centred(radii: [f64; 2], height: f64) -> Coil {
    Coil { radii, heights: [-0.5 * height, 0.5 * height] }
}

/// Whether what a row leaves out stays within what its limit says of it.
fn small(effect: f64, limit: f64, what: &str) -> Result<(), String> {
    if effect.abs() < limit { Ok(()) } else { Err(format!("{what} {effect:.1e}")) }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::builders;
    use crate::coils::{mutual_inductance, self_inductance};
    use crate::references::published;
    use crate::solver::{Solved, solve};
    use crate::stored;
    use crate::table::{self, Exact, guarantee};
    use expect_test::expect_file;
    use gapwright::units::MU0;

    #[test]
    fn the_table_holds_and_has_not_drifted() {
        let (rows, left_out) = (rows(), &left_out::LEFT_OUT);
        crate::say(&table::printed(&rows, left_out));
        let failed: Vec<&Row> = rows.iter().filter(|row| !row.passed).collect();
        assert!(failed.is_empty(), "{} of {} rows: {failed:#?}", failed.len(), rows.len());
        // Moves only when a row is added or an answer leaves its limit: UPDATE_EXPECT=1, and read the diff.
        let before = include_str!("table.txt");
        expect_file!["table.txt"].assert_eq(&stored::text(&rows, left_out, before));
    }

    #[test]
    fn the_quadrature_and_the_published_touching_coils_are_two_sources() {
        // The row of the touching coils adds our self inductances to the published mutual: they must fit together.
        let row = &published("COILS-")[0];
        let coil = |v: Vec<f64>| Coil { radii: [v[0], v[1]], heights: [v[2], v[3]] };
        let pair = [coil(row.input_list("c1")), coil(row.input_list("c2"))];
        row.agrees("M_over_mu0N1N2", mutual_inductance(&pair[0], &pair[1]), 1e-10);
    }

    #[test]
    fn a_wrong_reference_fails_its_row() {
        let solved: Result<Solved, String> = solve(&builders::r7(), 1e-3);
        let right = 0.5 * MU0 * 1e4 * self_inductance(&centred([0.02, 0.03], 0.01));
        let exact = |coenergy| Exact { coenergy, scale: 1.0, unit: "J", error: 0.0, source: "" };
        let row = |coenergy| guarantee("R7", 1e-3, &solved, &exact(coenergy));
        assert!(row(right).passed);
        for factor in [1.002, 0.998] {
            assert!(!row(factor * right).passed);
        }
    }
}
