//! Pasted typography: Greek letters and their spelled names, and the plain character behind a decorated one.

/// Spelled names of α to ω in the order of Unicode; the second sigma is the final form ς.
const GREEK: [&str; 25] = [
    "alpha", "beta", "gamma", "delta", "epsilon", "zeta", "eta", "theta", "iota", "kappa", "lambda", "mu", "nu", "xi",
    "omicron", "pi", "rho", "sigma", "sigma", "tau", "upsilon", "phi", "chi", "psi", "omega",
];

/// The same with a capital.
const GREEK_CAPITALS: [&str; 25] = [
    "Alpha", "Beta", "Gamma", "Delta", "Epsilon", "Zeta", "Eta", "Theta", "Iota", "Kappa", "Lambda", "Mu", "Nu", "Xi",
    "Omicron", "Pi", "Rho", "Sigma", "Sigma", "Tau", "Upsilon", "Phi", "Chi", "Psi", "Omega",
];

const ALPHA: u32 = 0x3B1;
const CAPITAL_ALPHA: u32 = 0x391;
/// ς stands before σ: of two equal names the later one is displayed.
const FINAL_SIGMA: usize = 17;

/// The spelled name of a Greek letter: `τ` is `tau`.
pub(super) fn spelled(letter: char) -> Option<&'static str> {
    let code = u32::from(letter);
    let at = |first: u32, table: &[&'static str; 25]| table.get(code.checked_sub(first)? as usize).copied();
    at(ALPHA, &GREEK).or_else(|| at(CAPITAL_ALPHA, &GREEK_CAPITALS))
}

/// The Greek letter of a spelled name: `tau` is `τ`.
pub(super) fn letter(name: &str) -> Option<char> {
    let find = |table: &[&str; 25], first: u32| {
        let index = table.iter().position(|entry| *entry == name)?;
        char::from_u32(first + if index == FINAL_SIGMA { index + 1 } else { index } as u32)
    };
    find(&GREEK, ALPHA).or_else(|| find(&GREEK_CAPITALS, CAPITAL_ALPHA))
}

/// The plain character that a decorated one stands for: `×` is `*`, `−` is `-`, `𝑠` is `s`, `µ` is `μ`.
pub(super) fn plain(character: char) -> char {
    match character {
        // Middle dot, multiplication sign, asterisk operator, dot operator, bullet operator, full-width asterisk.
        '\u{B7}' | '\u{D7}' | '\u{2217}' | '\u{22C5}' | '\u{2219}' | '\u{FF0A}' => '*',
        // Hyphen, non-breaking hyphen, figure dash, en dash, em dash, minus sign, small and full-width hyphen.
        '\u{2010}'..='\u{2014}' | '\u{2212}' | '\u{FE63}' | '\u{FF0D}' => '-',
        // Division sign, fraction slash, division slash.
        '\u{F7}' | '\u{2044}' | '\u{2215}' => '/',
        // Zero-width marks and the invisible operators of typeset formulas separate like a space.
        '\u{200B}'..='\u{200D}' | '\u{2060}'..='\u{2063}' | '\u{FEFF}' | '\u{AD}' => ' ',
        space if space.is_whitespace() => ' ',
        '\u{B5}' => 'μ',
        '\u{2126}' => 'Ω',
        '\u{210E}' => 'h',
        'ϑ' | 'ϴ' => 'θ',
        'ϕ' => 'φ',
        'ϵ' => 'ε',
        'ϰ' => 'κ',
        'ϱ' => 'ρ',
        'ϖ' => 'π',
        // Full-width forms of ASCII.
        '\u{FF01}'..='\u{FF5E}' => char::from_u32(u32::from(character) - 0xFEE0).unwrap_or(character),
        '\u{1D400}'..='\u{1D7FF}' => mathematical(u32::from(character)).unwrap_or(character),
        other => other,
    }
}

/// Letters and digits of the block "Mathematical Alphanumeric Symbols", which formula editors paste (Unicode 15, 22.2).
fn mathematical(code: u32) -> Option<char> {
    /// Thirteen styles of the Latin alphabet, capitals first.
    const LATIN: u32 = 0x1D400;
    /// Five styles of the Greek alphabet: 25 capitals, nabla, 25 small letters, 7 variants.
    const GREEK_STYLES: u32 = 0x1D6A8;
    const DIGITS: u32 = 0x1D7CE;
    if code < LATIN + 13 * 52 {
        let index = (code - LATIN) % 52;
        let first = if index < 26 { u32::from('A') } else { u32::from('a') - 26 };
        return char::from_u32(first + index);
    }
    if (DIGITS..DIGITS + 50).contains(&code) {
        return char::from_u32(u32::from('0') + (code - DIGITS) % 10);
    }
    let index = code.checked_sub(GREEK_STYLES).filter(|index| *index < 5 * 58)? % 58;
    match index {
        0..=24 => char::from_u32(CAPITAL_ALPHA + index).map(|letter| if index == 17 { 'Θ' } else { letter }),
        26..=50 => char::from_u32(ALPHA + index - 26),
        52..=57 => ['ε', 'θ', 'κ', 'φ', 'ρ', 'π'].get(index as usize - 52).copied(),
        _ => None,
    }
}

/// The character of a superscript one: `²` is `2`, `⁻` is `-`.
pub(super) fn superscript(character: char) -> Option<char> {
    Some(match character {
        '⁰' => '0',
        '¹' => '1',
        '²' => '2',
        '³' => '3',
        '⁴'..='⁹' => char::from_u32(u32::from(character) - 0x2070 + u32::from('0'))?,
        '⁺' => '+',
        '⁻' => '-',
        _ => return None,
    })
}

/// The character of a subscript one: `₁` is `1`, `ᵢ` is `i`.
pub(super) fn subscript(character: char) -> Option<char> {
    const SUBSCRIPTS: [(char, char); 17] = [
        ('ₐ', 'a'),
        ('ₑ', 'e'),
        ('ₕ', 'h'),
        ('ᵢ', 'i'),
        ('ⱼ', 'j'),
        ('ₖ', 'k'),
        ('ₗ', 'l'),
        ('ₘ', 'm'),
        ('ₙ', 'n'),
        ('ₒ', 'o'),
        ('ₚ', 'p'),
        ('ᵣ', 'r'),
        ('ₛ', 's'),
        ('ₜ', 't'),
        ('ᵤ', 'u'),
        ('ᵥ', 'v'),
        ('ₓ', 'x'),
    ];
    if ('₀'..='₉').contains(&character) {
        return char::from_u32(u32::from(character) - 0x2080 + u32::from('0'));
    }
    SUBSCRIPTS.iter().find(|(low, _)| *low == character).map(|(_, plain)| *plain)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_greek_letter_comes_back_from_its_name() {
        for code in (ALPHA..ALPHA + 25).chain(CAPITAL_ALPHA..CAPITAL_ALPHA + 25) {
            let Some(character) = char::from_u32(code) else {
                continue;
            };
            let name = spelled(character).unwrap();
            let back = letter(name).unwrap();
            assert_eq!(spelled(back), Some(name));
            assert!(back == character || character == 'ς' || character == '\u{3A2}', "{character} came back as {back}");
        }
    }

    #[test]
    fn letters_of_formula_editors_become_plain() {
        let pasted = "𝑠𝐾𝜏𝜔𝟐𝛀𝜙ℎµΩ";
        let expected = "sKτω2ΩφhμΩ";
        assert!(pasted.chars().map(plain).eq(expected.chars()));
    }

    #[test]
    fn raised_and_lowered_digits_are_read() {
        assert!("⁰¹²³⁴⁵⁶⁷⁸⁹⁻".chars().filter_map(superscript).eq("0123456789-".chars()));
        assert!("₀₁₂₃₄₅₆₇₈₉ᵢ".chars().filter_map(subscript).eq("0123456789i".chars()));
    }
}
