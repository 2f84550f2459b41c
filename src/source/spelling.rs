//! The known word that was probably meant.

/// Words longer than this are nobody's slip of the pen, and comparing costs the product of lengths.
const LONGEST_WORD: usize = 64;

/// The word of `known` that `word` was probably meant to be, if any is near enough.
///
/// Near is: the same but for case, `-`, `_` and spaces; a beginning of it of three letters or
/// more (`thickness` for `thickness_nm`); or at most one slip in three letters, a swap of
/// neighbours counting as one. Of equally near words the first wins.
#[must_use]
pub fn nearest<'a>(word: &str, known: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let word = plain(word);
    let length = word.chars().count();
    if length == 0 || length > LONGEST_WORD {
        return None;
    }
    known
        .into_iter()
        .filter_map(|candidate| {
            let other = plain(candidate);
            let slips = strsim::damerau_levenshtein(&word, &other);
            let begins = length >= 3 && other.starts_with(&word);
            let near = slips <= length.max(3) / 3 && slips < other.chars().count();
            (near || begins).then_some((if begins { slips.min(1) } else { slips }, candidate))
        })
        .min_by_key(|(slips, _)| *slips)
        .map(|(_, candidate)| candidate)
}

fn plain(word: &str) -> String {
    word.chars()
        .filter(|letter| !matches!(letter, '_' | '-' | ' '))
        .flat_map(char::to_lowercase)
        .collect()
}

/// The words in backticks, in their order, the last after "or": `` `a`, `b` or `c` ``.
#[must_use]
pub fn one_of<'a>(words: impl IntoIterator<Item = &'a str>) -> String {
    let quoted: Vec<String> = words.into_iter().map(|word| format!("`{word}`")).collect();
    match quoted.split_last() {
        None => String::new(),
        Some((last, [])) => last.clone(),
        Some((last, others)) => format!("{} or {last}", others.join(", ")),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    const KEYS: [&str; 6] = [
        "thickness_nm",
        "material",
        "role",
        "donors_cm3",
        "acceptors_cm3",
        "repeat",
    ];

    #[test]
    fn slips_swaps_case_and_beginnings_are_recognised() {
        for (word, meant) in [
            ("thicknes_nm", "thickness_nm"),
            ("thickness", "thickness_nm"),
            ("Thickness-nm", "thickness_nm"),
            ("matreial", "material"),
            ("rloe", "role"),
            ("donor_cm3", "donors_cm3"),
            ("repeats", "repeat"),
        ] {
            assert_eq!(nearest(word, KEYS), Some(meant), "{word}");
        }
    }

    #[test]
    fn far_words_are_left_alone() {
        let long = "x".repeat(1 << 20);
        for word in ["", "x", "wavelength", "colour", long.as_str()] {
            assert_eq!(nearest(word, KEYS), None);
        }
    }

    #[test]
    fn lists_read_as_english() {
        assert_eq!(one_of(["a"]), "`a`");
        assert_eq!(one_of(["a", "b", "c"]), "`a`, `b` or `c`");
    }
}
