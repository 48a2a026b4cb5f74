//! Tables → CSV text: probe points and rounds, SI units in the header, a full stop as the decimal mark.

use crate::results::{ProbeResult, Round};
use std::fmt::Write;

/// One line a probe point: name, place [m], B [T], H [A/m], ψ [Wb/rad].
pub fn probes(probes: &[ProbeResult]) -> String {
    let mut text =
        "probe,r [m],z [m],B_r [T],B_z [T],H_r [A/m],H_z [A/m],psi [Wb/rad]\n".to_string();
    for probe in probes {
        let name = field(&probe.name);
        for p in &probe.points {
            row(&mut text, &name, &[p.r, p.z, p.b_r, p.b_z, p.h_r, p.h_z, p.psi]);
        }
    }
    text
}

/// One line a round: counts, and the ends of the quantity that `interval` speaks of (`quantity` names it).
pub fn rounds(rounds: &[Round], quantity: &str) -> String {
    let mut text = format!(
        "round,unknowns,triangles,Newton steps,CG iterations,{},{}\n",
        field(&format!("{quantity} low")),
        { field(&format!("{quantity} high")) }
    );
    for (i, round) in rounds.iter().enumerate() {
        let counts = format!(
            "{},{},{},{},{}",
            i + 1,
            round.n_unknowns,
            round.n_triangles,
            round.n_newton_steps,
            round.n_cg_iterations
        );
        row(&mut text, &counts, &[round.low, round.high]);
    }
    text
}

fn row(text: &mut String, head: &str, values: &[f64]) {
    text.push_str(head);
    for value in values {
        // Writing into a String cannot fail; `{:e}` is the shortest text that reads back as the same f64.
        let _ = write!(text, ",{value:e}");
    }
    text.push('\n');
}

/// A CSV field, quoted where RFC 4180 wants it.
pub(super) fn field(text: &str) -> String {
    if text.contains([',', '"', '\n', '\r']) {
        format!("\"{}\"", text.replace('"', "\"\""))
    } else {
        text.to_string()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::report::fixture;

    #[test]
    fn probe_values_read_back_as_the_same_numbers() {
        let mut results = fixture::results();
        results.probes[0].name = "axis, \"upper\" half".to_string();
        let text = probes(&results.probes);
        let mut reader = ::csv::Reader::from_reader(text.as_bytes());
        let rows: Vec<_> = reader.records().map(|r| r.unwrap()).collect();
        assert_eq!(rows.len(), results.probes[0].points.len());
        for (row, point) in rows.iter().zip(&results.probes[0].points) {
            assert_eq!(&row[0], "axis, \"upper\" half");
            assert_eq!(row[4].parse::<f64>().unwrap(), point.b_z);
            assert_eq!(row[7].parse::<f64>().unwrap(), point.psi);
        }
    }

    #[test]
    fn rounds_have_one_line_each_below_the_header() {
        let results = fixture::results();
        let text = rounds(&results.rounds, "inductance [H]");
        assert_eq!(text.lines().count(), results.rounds.len() + 1);
        assert!(text.lines().next().unwrap().ends_with("inductance [H] low,inductance [H] high"));
        assert!(text.lines().nth(1).unwrap().starts_with("1,540,"));
    }
}
