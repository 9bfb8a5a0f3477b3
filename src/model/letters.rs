//! Letters that look like others.

/// Names the first sign in which two look-alikes differ.
pub(crate) fn difference(a: &str, b: &str) -> String {
    let differing = a.chars().zip(b.chars()).enumerate().find(|(_, (x, y))| x != y);
    match differing {
        Some((at, (x, y))) if x.is_ascii() && y.is_ascii() => format!("its character {} is `{x}`, not `{y}`", at + 1),
        Some((at, (x, y))) => {
            format!("its character {} is U+{:04X}, not U+{:04X}", at + 1, u32::from(x), u32::from(y))
        }
        None => "they differ in length".to_owned(),
    }
}

/// A name with every letter that looks like a Latin one replaced by it.
pub(crate) fn skeleton(name: &str) -> String {
    name.chars().map(latin).collect()
}

/// The Latin letter or digit that a Cyrillic, Greek or full-width one is easily taken for.
fn latin(character: char) -> char {
    match character {
        '\u{ff01}'..='\u{ff5e}' => char::from_u32(u32::from(character) - 0xfee0).unwrap_or(character),
        'А' | 'Α' => 'A',
        'В' | 'Β' => 'B',
        'С' | 'Ϲ' => 'C',
        'Е' | 'Ε' => 'E',
        'Н' | 'Η' => 'H',
        'І' | 'Ι' | 'Ӏ' => 'I',
        'Ј' => 'J',
        'К' | 'Κ' => 'K',
        'М' | 'Μ' => 'M',
        'Ν' => 'N',
        'О' | 'Ο' => 'O',
        'Р' | 'Ρ' => 'P',
        'Ѕ' => 'S',
        'Т' | 'Τ' => 'T',
        'Х' | 'Χ' => 'X',
        'У' | 'Υ' | 'Ү' => 'Y',
        'Ζ' => 'Z',
        'а' | 'α' | 'ɑ' => 'a',
        'с' | 'ϲ' => 'c',
        'ԁ' => 'd',
        'е' => 'e',
        'һ' => 'h',
        'і' | 'ι' | 'ı' => 'i',
        'ј' => 'j',
        'к' | 'κ' => 'k',
        'о' | 'ο' => 'o',
        'р' | 'ρ' => 'p',
        'ѕ' => 's',
        'υ' => 'u',
        'ν' | 'ѵ' => 'v',
        'ԝ' => 'w',
        'х' | 'χ' => 'x',
        'у' | 'γ' => 'y',
        _ => character,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn letters_of_another_script_look_latin() {
        assert_eq!(skeleton("k\u{456}ln"), "kiln");
        assert_eq!(skeleton("печь"), "пeчь");
        assert_eq!(difference("k\u{456}ln", "kiln"), "its character 2 is U+0456, not U+0069");
        assert_eq!(difference("ki1n", "kiln"), "its character 3 is `1`, not `l`");
    }
}
