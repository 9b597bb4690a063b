//! Bytes as printable text: 13 bits in two of 91 characters, so that the text is 23 % longer than the bytes; base64 is a third
//! longer. The page reads it back in `www/src/packed.ts`.
//!
//! The characters are those of ASCII from ! to ~ without <, > and &, which mean something in HTML.

/// Numbers of two characters.
const CHARACTERS: u32 = 91;

/// Bits in two characters: 2^13 = 8192 of 91² = 8281.
const BITS: u32 = 13;

/// The text of some bytes.
pub(crate) fn printable(bytes: &[u8]) -> String {
    let mut text = String::with_capacity(bytes.len() * 16 / 13 + 2);
    let (mut waiting, mut count) = (0_u32, 0);
    for byte in bytes {
        waiting |= u32::from(*byte) << count;
        count += 8;
        if count >= BITS {
            push(&mut text, waiting & ((1 << BITS) - 1));
            waiting >>= BITS;
            count -= BITS;
        }
    }
    if count > 0 {
        push(&mut text, waiting);
    }
    text
}

fn push(text: &mut String, pair: u32) {
    text.push(character(pair / CHARACTERS));
    text.push(character(pair % CHARACTERS));
}

/// The character of a number below 91: the gaps of <, > and & are skipped.
fn character(number: u32) -> char {
    let code = number + u32::from(b'!');
    let code = code + u32::from(code >= u32::from(b'&'));
    let code = code + u32::from(code >= u32::from(b'<'));
    let code = code + u32::from(code >= u32::from(b'>'));
    char::from_u32(code).unwrap_or('!')
}

#[cfg(test)]
mod tests {
    use super::printable;

    /// The same example stands in `www/test/packed.test.ts`, which reads it.
    #[test]
    fn bytes_become_the_text_that_the_page_reads() {
        assert_eq!(printable(&[]), "");
        assert_eq!(printable(b"Stayband"), EXAMPLE);
        assert_eq!(printable(&[0; 3]), "!!!!");
    }

    #[test]
    fn the_text_means_nothing_in_html() {
        let all: Vec<u8> = (0..=255).flat_map(|a| (0..=255).step_by(5).map(move |b| a ^ b)).collect();
        let text = printable(&all);
        assert!(text.bytes().all(|c| (b'!'..=b'~').contains(&c) && !b"<>&".contains(&c)));
        assert!(text.len() * 100 < all.len() * 124);
    }

    const EXAMPLE: &str = "]2C(i9tv3_";
}
