//! The nearest known word to a misspelt one.

/// The known word closest to `word`, if it is close enough to be meant.
pub(super) fn suggestion<'a>(word: &str, known: &[&'a str]) -> Option<&'a str> {
    let stem = |text: &str| text.split('_').next().unwrap_or_default().to_owned();
    let nearest = known.iter().map(|candidate| (distance(word, candidate), *candidate)).min()?;
    if nearest.0 <= 1 + word.chars().count() / 4 {
        return Some(nearest.1);
    }
    // The same quantity with another unit: `altitude_ft` for `altitude_m`.
    let body = |text: &str| text.rsplit_once('_').map_or(text, |(body, _)| body).to_owned();
    let same = known.iter().find(|candidate| {
        body(candidate) == body(word) || body(candidate) == word || **candidate == body(word)
    });
    same.or_else(|| known.iter().find(|candidate| stem(candidate) == stem(word))).copied()
}

/// Levenshtein's edit distance.
fn distance(one: &str, other: &str) -> usize {
    let other: Vec<char> = other.chars().collect();
    let mut row: Vec<usize> = (0..=other.len()).collect();
    for (i, a) in one.chars().enumerate() {
        let mut diagonal = row[0];
        row[0] = i + 1;
        for (j, b) in other.iter().enumerate() {
            let replaced = diagonal + usize::from(a != *b);
            diagonal = row[j + 1];
            row[j + 1] = replaced.min(row[j] + 1).min(diagonal + 1);
        }
    }
    row[other.len()]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn misspellings_and_other_units_find_their_word() {
        let known = ["altitude_m", "latitude_deg", "name", "mirror_area_m2"];
        assert_eq!(suggestion("latitude_dg", &known), Some("latitude_deg"));
        assert_eq!(suggestion("altitude_ft", &known), Some("altitude_m"));
        assert_eq!(suggestion("altitude", &known), Some("altitude_m"));
        assert_eq!(suggestion("mirror_diameter_m", &known), Some("mirror_area_m2"));
        assert_eq!(suggestion("zzz", &known), None);
    }

    #[test]
    fn distance_of_textbook_words() {
        // Levenshtein 1966; the usual textbook pair.
        assert_eq!(distance("kitten", "sitting"), 3);
        assert_eq!(distance("", "abc"), 3);
    }
}
