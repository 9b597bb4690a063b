//! Puts style, scripts and WebAssembly into `www/index.html`.
//!
//! The marks of the page, each exactly once: the comments `pack:style`, `pack:worker`, `pack:wasm`, `pack:script` and
//! `pack:start` become elements. The page's script is packed like the WebAssembly; the short one at `pack:start` unpacks
//! and runs it. `__STYLE_HASH__`, `__START_HASH__` and `__SCRIPT_HASH__` in the Content-Security-Policy become the hashes
//! of the one style sheet and these two scripts, so that no other may run; `__PROGRAM_HASH__` becomes the SHA-256 of the whole page
//! as it is with nothing in that place.

use crate::bundle::Scripts;
use crate::hexadecimal;
use crate::places::Places;
use crate::printable::printable;
use anyhow::{Context, Result, bail};
use base64::Engine;
use base64::engine::general_purpose::STANDARD;
use sha2::{Digest, Sha256};
use std::fs;

/// The place of the page's own hash.
const PROGRAM_HASH: &str = "__PROGRAM_HASH__";
/// Bytes the file must stay below.
const MOST_BYTES: usize = 700_000;

/// What goes into the page.
pub(crate) struct Parts {
    pub(crate) wasm: Vec<u8>,
    pub(crate) scripts: Scripts,
}

/// The page and its hash.
pub(crate) struct Page {
    pub(crate) html: String,
    pub(crate) program_hash: String,
}

/// Puts the parts into the page.
pub(crate) fn assemble(places: &Places, parts: &Parts) -> Result<Page> {
    let read = |name: &str| {
        let path = places.www.join(name);
        fs::read_to_string(&path).with_context(|| format!("cannot read {}", path.display()))
    };
    let style = style(&read("style.css")?)?;
    let start = inline(&parts.scripts.start);
    let script = &parts.scripts.page;
    let worker = inline(&parts.scripts.worker);
    let mut html = read("index.html")?;
    html = fill(&html, "__STYLE_HASH__", &policy_hash(&style))?;
    html = fill(&html, "__START_HASH__", &policy_hash(&start))?;
    html = fill(&html, "__SCRIPT_HASH__", &policy_hash(script))?;
    html = fill(&html, "<!-- pack:style -->", &format!("<style>{style}</style>"))?;
    html = fill(&html, "<!-- pack:script -->", &packed("page-script", script.as_bytes())?)?;
    html = fill(&html, "<!-- pack:start -->", &format!("<script>{start}</script>"))?;
    let worker = format!("<script type=\"text/plain\" id=\"worker-source\">{worker}</script>");
    html = fill(&html, "<!-- pack:worker -->", &worker)?;
    html = fill(&html, "<!-- pack:wasm -->", &packed("engine-wasm", &parts.wasm)?)?;

    let program_hash = hexadecimal(&Sha256::digest(fill(&html, PROGRAM_HASH, "")?));
    let html = fill(&html, PROGRAM_HASH, &program_hash)?;
    if html.len() >= MOST_BYTES {
        bail!("the page has {} bytes; it must stay below {MOST_BYTES}", html.len());
    }
    Ok(Page { html, program_hash })
}

/// An element that the browser does not run, with the bytes deflated, as printable text.
fn packed(id: &str, bytes: &[u8]) -> Result<String> {
    let deflated = deflate(bytes)?;
    let (count, text) = (deflated.len(), printable(&deflated));
    Ok(format!("<script type=\"application/octet-stream\" id=\"{id}\" data-bytes=\"{count}\">{text}</script>"))
}

/// Puts `value` in the place of `mark`, which must be there once.
fn fill(html: &str, mark: &str, value: &str) -> Result<String> {
    let count = html.matches(mark).count();
    if count != 1 {
        bail!("the mark {mark} must be in the page once, and is {count} times");
    }
    Ok(html.replacen(mark, value, 1))
}

/// A script as it may stand between script tags: it cannot end the element or open a comment in it. Both texts occur
/// in a minified script only inside strings and patterns, where the backslash changes nothing.
fn inline(script: &str) -> String {
    script.replace("</script", "<\\/script").replace("<!--", "<\\!--")
}

/// A style sheet as it may stand between style tags.
fn style(sheet: &str) -> Result<String> {
    if sheet.contains("</style") {
        bail!("style.css must not contain the end of a style element");
    }
    Ok(sheet.to_owned())
}

/// A hash as a Content-Security-Policy names it.
fn policy_hash(text: &str) -> String {
    format!("sha256-{}", STANDARD.encode(Sha256::digest(text)))
}

/// The bytes as a raw deflate stream, packed as tightly as the format allows: 4.6 % tighter than by the usual search,
/// for a few seconds.
fn deflate(bytes: &[u8]) -> Result<Vec<u8>> {
    let mut packed = Vec::new();
    zopfli::compress(zopfli::Options::default(), zopfli::Format::Deflate, bytes, &mut packed)?;
    Ok(packed)
}

#[cfg(test)]
mod tests {
    use super::{fill, inline, policy_hash, style};

    #[test]
    fn a_mark_must_be_there_exactly_once() {
        assert_eq!(fill("a MARK b", "MARK", "x").unwrap(), "a x b");
        assert!(fill("a b", "MARK", "x").is_err());
        assert!(fill("MARK MARK", "MARK", "x").is_err());
    }

    #[test]
    fn a_script_cannot_end_its_element() {
        let script = inline("const a = \"</script><!-- b\";");
        assert!(!script.contains("</script"));
        assert!(!script.contains("<!--"));
    }

    #[test]
    fn a_style_sheet_cannot_end_its_element() {
        assert!(style("a { color: red } </style>").is_err());
    }

    /// SHA-256 of the empty text (e3b0c442 ... b855, from memory), in base64.
    #[test]
    fn the_policy_names_a_hash_in_base64() {
        assert_eq!(policy_hash(""), "sha256-47DEQpj8HBSa+/TImW+5JCeuQeRkm5NMpJWZG3hSuFU=");
    }
}
