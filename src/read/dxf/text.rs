//! From bytes to text: the code page of the file, and the `\U+nnnn` escapes of its names.

use std::borrow::Cow;

use encoding_rs::{Encoding, UTF_8, WINDOWS_1252};

/// The text of the file: UTF-8 from AC1021 on or where no code page is declared, else the declared code page
/// (DXF reference, `$DWGCODEPAGE`). Bytes that fit neither are read as code page 1252: only names depend on
/// it.
pub(super) fn decode(bytes: &[u8]) -> Cow<'_, str> {
    let declared = variable(bytes, "$DWGCODEPAGE").and_then(|name| code_page(&name));
    let version = variable(bytes, "$ACADVER").unwrap_or_default();
    let expected = if version.as_str() >= "AC1021" { UTF_8 } else { declared.unwrap_or(UTF_8) };
    [expected, declared.unwrap_or(WINDOWS_1252)]
        .iter()
        .find_map(|encoding| encoding.decode_without_bom_handling_and_without_replacement(bytes))
        .unwrap_or_else(|| WINDOWS_1252.decode_without_bom_handling(bytes).0)
}

/// The text value of a header variable, looked for in the raw bytes before the code page is known.
fn variable(bytes: &[u8], name: &str) -> Option<String> {
    let mut lines = bytes.split(|&b| b == b'\n').map(<[u8]>::trim_ascii);
    let mut before_end = lines.by_ref().take_while(|&line| line != b"ENDSEC");
    before_end.find(|&line| line == name.as_bytes())?;
    let value = before_end.nth(1)?;
    Some(String::from_utf8_lossy(value).into_owned())
}

/// The encoding of a `$DWGCODEPAGE` value such as `ANSI_1252`; `None` for pages that no library here knows.
fn code_page(name: &str) -> Option<&'static Encoding> {
    let name = name.to_ascii_lowercase();
    let number = name.trim_start_matches(|c: char| !c.is_ascii_digit());
    let label = match number {
        "932" => "shift_jis",
        "936" => "gbk",
        "949" => "euc-kr",
        "950" => "big5",
        "866" => "ibm866",
        _ => return Encoding::for_label(format!("windows-{number}").as_bytes()),
    };
    Encoding::for_label(label.as_bytes())
}

/// A name with its `\U+nnnn` escapes resolved. What is no valid escape stays as it is.
pub(super) fn unescape(name: &str) -> Cow<'_, str> {
    if !name.contains("\\U+") {
        return Cow::Borrowed(name);
    }
    let mut pieces = name.split("\\U+");
    let mut plain = pieces.next().unwrap_or_default().to_owned();
    for piece in pieces {
        match piece.get(..4).and_then(|hex| u32::from_str_radix(hex, 16).ok()).and_then(char::from_u32) {
            Some(letter) => {
                plain.push(letter);
                plain.push_str(&piece[4..]);
            }
            None => {
                plain.push_str("\\U+");
                plain.push_str(piece);
            }
        }
    }
    Cow::Owned(plain)
}
