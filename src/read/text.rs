//! What a file is, told from its bytes, and its text decoded.

use std::borrow::Cow;

use encoding_rs::{Encoding, UTF_8, UTF_16BE, UTF_16LE};

use crate::error::{Error, Kind};

/// A file's content, by kind.
pub(super) enum Content<'a> {
    /// XML, decoded.
    Xml(Cow<'a, str>),
    /// Group codes and values; 8-bit text stays as it is, its code page stands inside.
    Dxf(Cow<'a, [u8]>),
    /// Anything else that is text: a point list, or nothing we know.
    Points(Cow<'a, [u8]>),
}

/// The first bytes of the binary form of DXF (DXF Reference, "Binary DXF Files").
const BINARY_DXF: &[u8] = b"AutoCAD Binary DXF";

/// Tells what `bytes` are.
pub(super) fn tell(bytes: &[u8]) -> Result<Content<'_>, Error> {
    if bytes.starts_with(BINARY_DXF) {
        return Err(input("this is a DXF file in binary form", "save it again as ASCII (text) DXF"));
    }
    if bytes.starts_with(&[0x1f, 0x8b]) {
        return Err(input("this file is compressed", "unpack it first, or save it as plain SVG or DXF"));
    }
    let text = as_8_bit(bytes)?;
    let start = text.iter().position(|b| !b.is_ascii_whitespace());
    let Some(start) = start else {
        return Err(input(
            "the file is empty",
            "save the drawing again and check that it has a size above zero",
        ));
    };
    refuse_binary(&text)?;
    if text[start] == b'<' {
        decode_xml(text).map(Content::Xml)
    } else if starts_as_dxf(&text[start..]) {
        Ok(Content::Dxf(text))
    } else {
        Ok(Content::Points(text))
    }
}

/// The bytes without a byte order mark; UTF-16, with a mark or without, as UTF-8.
fn as_8_bit(bytes: &[u8]) -> Result<Cow<'_, [u8]>, Error> {
    let (encoding, body) = match Encoding::for_bom(bytes) {
        Some((encoding, mark)) => (encoding, &bytes[mark..]),
        None if bytes.starts_with(b"<\0") => (UTF_16LE, bytes),
        None if bytes.starts_with(b"\0<") => (UTF_16BE, bytes),
        None => (UTF_8, bytes),
    };
    if encoding == UTF_8 {
        return Ok(Cow::Borrowed(body));
    }
    let text = encoding.decode_without_bom_handling_and_without_replacement(body);
    let text = text.ok_or_else(|| {
        input("the text is damaged: it is marked as UTF-16 and is not", "save it again as UTF-8")
    })?;
    Ok(Cow::Owned(text.into_owned().into_bytes()))
}

/// Control characters that no text has, looked for in the first 64 KiB.
fn refuse_binary(text: &[u8]) -> Result<(), Error> {
    let control = |b: &u8| *b < 0x20 && !matches!(b, b'\t' | b'\n' | b'\r' | 0x0b | 0x0c | 0x1a);
    let Some(at) = text.iter().take(1 << 16).position(control) else { return Ok(()) };
    let what = format!("this is not text: byte {} is {:#04x}", at + 1, text[at]);
    Err(input(&what, "give an SVG, an ASCII DXF or a list of points"))
}

/// A DXF file opens with group code 0 (or 999, a comment) alone on its line.
fn starts_as_dxf(text: &[u8]) -> bool {
    let line = text.split(|b| matches!(b, b'\n' | b'\r')).next().unwrap_or_default();
    matches!(line.trim_ascii(), b"0" | b"999")
}

/// XML text by the encoding its declaration names; UTF-8 without one.
fn decode_xml(bytes: Cow<'_, [u8]>) -> Result<Cow<'_, str>, Error> {
    let bytes = match bytes {
        Cow::Borrowed(bytes) => bytes,
        // Was UTF-16, whatever its declaration says of itself.
        Cow::Owned(bytes) => return Ok(Cow::Owned(String::from_utf8_lossy(&bytes).into_owned())),
    };
    if let Ok(text) = std::str::from_utf8(bytes) {
        return Ok(Cow::Borrowed(text));
    }
    let encoding = declared_encoding(bytes).filter(|&e| e != UTF_8);
    let text = encoding.and_then(|e| e.decode_without_bom_handling_and_without_replacement(bytes));
    text.ok_or_else(|| {
        input("the text is not in the encoding that its first line names", "save it again as UTF-8")
    })
}

fn declared_encoding(bytes: &[u8]) -> Option<&'static Encoding> {
    let end = bytes.iter().position(|&b| b == b'>')?;
    let declaration = std::str::from_utf8(&bytes[..end]).ok()?;
    let (_, value) = declaration.split_once("encoding")?;
    let value = value.trim_start().strip_prefix('=')?.trim_start();
    let quote = value.chars().next().filter(|c| matches!(c, '"' | '\''))?;
    Encoding::for_label(value[1..].split(quote).next()?.as_bytes())
}

fn input(what: &str, remedy: &str) -> Error {
    Error::new(Kind::Input, what).remedy(remedy)
}
