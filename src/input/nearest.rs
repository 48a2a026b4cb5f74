//! Edit distance, for "the nearest known key is …".

/// The candidate with the fewest single-letter edits from `word`; the first of equals.
pub fn nearest<'a>(word: &str, candidates: &[&'a str]) -> Option<&'a str> {
    candidates.iter().copied().min_by_key(|candidate| distance(word, candidate))
}

/// Letters of a word that are compared; a longer one is no misspelling of any key.
const LETTERS_MAX: usize = 64;

/// Insertions, deletions, replacements and swaps of neighbours that turn `a` into `b`
/// (optimal string alignment; Damerau 1964).
pub fn distance(a: &str, b: &str) -> usize {
    let a: Vec<char> = a.chars().take(LETTERS_MAX).collect();
    let b: Vec<char> = b.chars().take(LETTERS_MAX).collect();
    let mut before: Vec<usize> = vec![0; b.len() + 1];
    let mut last: Vec<usize> = (0..=b.len()).collect();
    for i in 1..=a.len() {
        let mut row = vec![i; b.len() + 1];
        for j in 1..=b.len() {
            let replaced = last[j - 1] + usize::from(a[i - 1] != b[j - 1]);
            row[j] = replaced.min(last[j] + 1).min(row[j - 1] + 1);
            if 1 < i && 1 < j && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1] {
                row[j] = row[j].min(before[j - 2] + 1);
            }
        }
        before = std::mem::replace(&mut last, row);
    }
    last[b.len()]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn counts_single_letter_edits_and_swaps() {
        for (a, b, edits) in [
            ("", "", 0),
            ("gap", "gap", 0),
            ("gaps", "gap", 1),
            ("heigth", "height", 1),
            ("", "abc", 3),
            ("kitten", "sitting", 3),
        ] {
            assert_eq!((distance(a, b), distance(b, a)), (edits, edits));
        }
    }

    #[test]
    fn names_the_nearest_key() {
        assert_eq!(nearest("curent", &["turns", "current", "ripple"]), Some("current"));
        assert_eq!(nearest("x", &[]), None);
    }
}
