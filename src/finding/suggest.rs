//! Names that are nearly another: edit distance, and letters that look alike.

/// The known name that `word` was most likely meant to be; the first of equals wins, so that the
/// answer depends on the order given and on nothing else.
pub fn near<'a>(word: &str, known: impl Iterator<Item = &'a str>) -> Option<String> {
    let folded = fold(word);
    let length = word.chars().count();
    // A third of the letters, at least one: `yrad` for `yard`, `effciency` for `efficiency`.
    let most = (length / 3).clamp(1, 3);
    let mut best: Option<(usize, &str)> = None;
    for candidate in known {
        if candidate == word {
            continue;
        }
        let distance = if fold(candidate) == folded {
            0
        } else if candidate.chars().count().abs_diff(length) > most {
            continue;
        } else {
            distance(word, candidate)
        };
        let single = length < 3 && distance > 0;
        if distance <= most && !single && best.is_none_or(|(least, _)| distance < least) {
            best = Some((distance, candidate));
        }
    }
    best.map(|(_, name)| name.to_owned())
}

/// Whether two words differ only by letters that look alike or by case: then nothing else was meant.
pub fn alike(word: &str, other: &str) -> bool {
    word != other && fold(word) == fold(other)
}

/// `word` with letters of other scripts that look like Latin ones replaced by those; `None` where
/// it holds none, or one that looks like nothing.
pub fn latin(word: &str) -> Option<String> {
    let plain: Option<String> = word.chars().map(|c| if c.is_ascii() { Some(c) } else { twin(c) }).collect();
    plain.filter(|plain| plain != word)
}

/// The Latin letter a Cyrillic, Greek or full-width one looks like in most fonts.
fn twin(letter: char) -> Option<char> {
    const TWINS: &[(&str, &str)] = &[
        ("АВЕКМНОРСТХУІЈЅ", "ABEKMHOPCTXYIJS"),
        ("асеорхуіјѕһԁԛԝ", "aceopxyijshdqw"),
        ("ΑΒΕΖΗΙΚΜΝΟΡΤΥΧ", "ABEZHIKMNOPTYX"),
        ("ονρυικα", "ovpuika"),
    ];
    if ('\u{ff01}'..='\u{ff5e}').contains(&letter) {
        return char::from_u32(letter as u32 - 0xfee0);
    }
    TWINS.iter().find_map(|(from, to)| {
        let at = from.chars().position(|c| c == letter)?;
        to.chars().nth(at)
    })
}

/// Letters that are mistaken for each other on a screen, and case, folded to one.
fn fold(word: &str) -> String {
    word.chars()
        .map(|c| match c {
            'l' | 'I' | '1' | 'i' | '|' => 'l',
            'O' | 'o' | '0' => 'o',
            '-' => '_',
            _ => c.to_ascii_lowercase(),
        })
        .collect()
}

/// Edits between two words; swapping two neighbours counts as one.
fn distance(a: &str, b: &str) -> usize {
    let (a, b): (Vec<char>, Vec<char>) = (a.chars().collect(), b.chars().collect());
    let width = b.len() + 1;
    let mut table = vec![0; (a.len() + 1) * width];
    for i in 0..=a.len() {
        for j in 0..=b.len() {
            table[i * width + j] = if i == 0 {
                j
            } else if j == 0 {
                i
            } else {
                let swap = usize::from(a[i - 1] != b[j - 1]);
                let mut least = (table[(i - 1) * width + j] + 1)
                    .min(table[i * width + j - 1] + 1)
                    .min(table[(i - 1) * width + j - 1] + swap);
                if i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1] {
                    least = least.min(table[(i - 2) * width + j - 2] + 1);
                }
                least
            };
        }
    }
    table[a.len() * width + b.len()]
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn near_names_are_found_and_far_ones_are_not() {
        let known = ["AlInP", "GaInP", "GaAs", "noon", "efficiency", "n"];
        let near = |word| near(word, known.into_iter());
        assert_eq!(near("AllnP").as_deref(), Some("AlInP"));
        assert_eq!(near("A1InP").as_deref(), Some("AlInP"));
        assert_eq!(near("nooon").as_deref(), Some("noon"));
        assert_eq!(near("nono").as_deref(), Some("noon"));
        assert_eq!(near("effciency").as_deref(), Some("efficiency"));
        assert_eq!(near("gaas").as_deref(), Some("GaAs"));
        assert_eq!(near("perovskite"), None);
        assert_eq!(near("x"), None);
    }

    #[test]
    fn letters_of_other_scripts_are_told_from_latin_ones() {
        // Cyrillic А, о; Greek capital omicron and Ρ; full-width G.
        assert_eq!(latin("АM1.5G").as_deref(), Some("AM1.5G"));
        assert_eq!(latin("tоp").as_deref(), Some("top"));
        assert_eq!(latin("ＧaInΡ").as_deref(), Some("GaInP"));
        assert_eq!(latin("GaAs"), None);
        assert_eq!(latin("größe"), None);
        assert!(alike("AllnP", "AlInP") && alike("gaas", "GaAs") && !alike("GaA", "GaAs"));
    }

    #[test]
    fn edits_are_counted() {
        // Hand values: one swap; three edits (kitten to sitting).
        assert_eq!(distance("yrad", "yard"), 1);
        assert_eq!(distance("kitten", "sitting"), 3);
        assert_eq!(distance("", "ab"), 2);
    }
}
