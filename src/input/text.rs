//! Bytes to text: one reader under every input file.
//!
//! It hashes what it reads, drops a byte-order mark, counts lines, and hands on UTF-8. Bytes that are not UTF-8 are read
//! as Windows-1252 (what spreadsheets call Latin-1), which loses nothing; the first such line is remembered so that the
//! reader can say so. What is plainly not text (a zipped workbook, UTF-16, NUL bytes) is refused by name. Memory is one
//! chunk, whatever the size of the file or of its lines.

use std::cell::RefCell;
use std::io::{self, Read};
use std::rc::Rc;

use sha2::{Digest, Sha256};

use super::InputFile;

/// Bytes read at a time, and looked at to tell formats apart.
const CHUNK: usize = 64 * 1024;
/// Largest text of one feature or one CSV row, bytes; a burn perimeter of a million vertices stays below it.
pub(crate) const RECORD_MAX_BYTES: u64 = 256 * 1024 * 1024;
/// Upper half of Windows-1252 from 0x80 to 0x9F; the five unassigned bytes keep their code (Unicode consortium table, recalled).
const WINDOWS_1252: [char; 32] = [
    '€', '\u{81}', '‚', 'ƒ', '„', '…', '†', '‡', 'ˆ', '‰', 'Š', '‹', 'Œ', '\u{8d}', 'Ž', '\u{8f}', '\u{90}', '‘', '’',
    '“', '”', '•', '–', '—', '˜', '™', 'š', '›', 'œ', '\u{9d}', 'ž', 'Ÿ',
];

/// Why bytes cannot be text.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub(crate) enum TextProblem {
    /// Another kind of file.
    #[error("{what}")]
    NotText {
        /// What the first bytes say it is.
        what: &'static str,
    },
    /// A NUL byte.
    #[error("a NUL byte in line {line}")]
    Nul {
        /// Line, from 1.
        line: u64,
    },
    /// One record beyond [`RECORD_MAX_BYTES`].
    #[error("one record of more than {} MB from line {line}", RECORD_MAX_BYTES / 1024 / 1024)]
    TooLong {
        /// Line where the record starts.
        line: u64,
    },
}

/// A shared handle on one text being read; clones read on from the same place.
#[derive(Clone)]
pub(crate) struct Text(Rc<RefCell<Inner>>);

struct Inner {
    source: Box<dyn Read>,
    ready: Vec<u8>,
    at: usize,
    carry: Vec<u8>,
    started: bool,
    ended: bool,
    line: u64,
    decoded_line: u64,
    consumed: u64,
    record_start: u64,
    record_line: u64,
    foreign_line: Option<u64>,
    hasher: Sha256,
    bytes: u64,
}

impl Text {
    /// Starts reading.
    pub(crate) fn new(source: impl Read + 'static) -> Text {
        Text(Rc::new(RefCell::new(Inner {
            source: Box::new(source),
            ready: Vec::new(),
            at: 0,
            carry: Vec::new(),
            started: false,
            ended: false,
            line: 1,
            decoded_line: 1,
            consumed: 0,
            record_start: 0,
            record_line: 1,
            foreign_line: None,
            hasher: Sha256::new(),
            bytes: 0,
        })))
    }

    /// The first bytes of text, without consuming them: a [`CHUNK`] of a file, at least one line of a pipe.
    pub(crate) fn head(&self) -> io::Result<Vec<u8>> {
        let mut inner = self.0.borrow_mut();
        let whole_line = |ready: &[u8]| {
            let text = ready.trim_ascii_start();
            text.contains(&b'\n') || text.len() >= CHUNK
        };
        while !whole_line(&inner.ready[inner.at..]) && inner.ready.len() - inner.at < CHUNK && !inner.ended {
            inner.fill()?;
        }
        let end = inner.ready.len().min(inner.at + CHUNK);
        Ok(inner.ready[inner.at..end].to_vec())
    }

    /// The line the next byte stands in, from 1.
    pub(crate) fn line(&self) -> u64 {
        self.0.borrow().line
    }

    /// Says that a record starts here: its length counts from this byte.
    pub(crate) fn start_record(&self) {
        let mut inner = self.0.borrow_mut();
        inner.record_start = inner.consumed;
        inner.record_line = inner.line;
    }

    /// First line with bytes that were not UTF-8 and were read as Windows-1252.
    pub(crate) fn foreign_line(&self) -> Option<u64> {
        self.0.borrow().foreign_line
    }

    /// The last few characters read and the next few: what an error message quotes.
    pub(crate) fn nearby(&self) -> String {
        let inner = self.0.borrow();
        let (from, to) = (inner.at.saturating_sub(30), inner.ready.len().min(inner.at + 10));
        String::from_utf8_lossy(&inner.ready[from..to]).replace('\u{fffd}', "")
    }

    /// The next record that ends in `separator`, or the rest; its first line. `None` at the end of the text.
    pub(crate) fn next_record(&self, separator: u8, record: &mut Vec<u8>) -> io::Result<Option<u64>> {
        record.clear();
        self.start_record();
        let mut inner = self.0.borrow_mut();
        let line = inner.line;
        let mut any = false;
        loop {
            if inner.at == inner.ready.len() {
                if inner.ended {
                    return Ok(any.then_some(line));
                }
                inner.fill()?;
                continue;
            }
            any = true;
            let rest = &inner.ready[inner.at..];
            let (take, done) = match rest.iter().position(|&b| b == separator) {
                Some(n) => (n, true),
                None => (rest.len(), false),
            };
            record.extend_from_slice(&rest[..take]);
            inner.advance(take + usize::from(done))?;
            if done {
                return Ok(Some(line));
            }
        }
    }

    /// Reads to the end and gives the file's name, length and SHA-256.
    pub(crate) fn finish(&self, name: &str) -> io::Result<InputFile> {
        let mut inner = self.0.borrow_mut();
        while !inner.ended {
            let n = inner.ready.len();
            inner.at = n;
            inner.fill()?;
        }
        drop(inner);
        Ok(self.so_far(name))
    }

    /// The file's name, and length and SHA-256 of what has been read of it.
    pub(crate) fn so_far(&self, name: &str) -> InputFile {
        let inner = self.0.borrow();
        let sha256 = inner.hasher.clone().finalize().iter().map(|b| format!("{b:02x}")).collect();
        InputFile { name: name.to_owned(), bytes: inner.bytes, sha256 }
    }
}

impl Read for Text {
    fn read(&mut self, out: &mut [u8]) -> io::Result<usize> {
        let mut inner = self.0.borrow_mut();
        // The JSON reader asks for one byte at a time.
        if let ([slot], Some(&byte)) = (&mut *out, inner.ready.get(inner.at)) {
            *slot = byte;
            inner.advance(1)?;
            return Ok(1);
        }
        while inner.at == inner.ready.len() {
            if inner.ended {
                return Ok(0);
            }
            inner.fill()?;
        }
        let n = out.len().min(inner.ready.len() - inner.at);
        out[..n].copy_from_slice(&inner.ready[inner.at..inner.at + n]);
        inner.advance(n)?;
        Ok(n)
    }
}

impl Inner {
    /// Consumes `n` ready bytes.
    fn advance(&mut self, n: usize) -> io::Result<()> {
        self.line += self.ready[self.at..self.at + n].iter().filter(|&&b| b == b'\n').count() as u64;
        self.at += n;
        self.consumed += n as u64;
        if self.consumed - self.record_start > RECORD_MAX_BYTES {
            return Err(io::Error::other(TextProblem::TooLong { line: self.record_line }));
        }
        Ok(())
    }

    /// Reads one chunk and makes it text.
    fn fill(&mut self) -> io::Result<()> {
        // A little of what was read stays for error messages.
        let keep = self.at.saturating_sub(40);
        self.ready.drain(..keep);
        self.at -= keep;
        let mut raw = std::mem::take(&mut self.carry);
        let old = raw.len();
        raw.resize(old + CHUNK, 0);
        let n = loop {
            match self.source.read(&mut raw[old..]) {
                Err(e) if e.kind() == io::ErrorKind::Interrupted => {}
                other => break other?,
            }
        };
        raw.truncate(old + n);
        self.hasher.update(&raw[old..]);
        self.bytes += n as u64;
        self.ended = n == 0;
        let mut bytes = &raw[..];
        if !self.started {
            if raw.len() < 4 && !self.ended {
                self.carry = raw;
                return Ok(());
            }
            self.started = true;
            if let Some(what) = other_kind_of_file(bytes) {
                return Err(io::Error::other(TextProblem::NotText { what }));
            }
            bytes = bytes.strip_prefix(b"\xEF\xBB\xBF").unwrap_or(bytes);
        }
        self.decode(bytes)
    }

    /// Appends `bytes` to the ready text, keeping an unfinished character for the next chunk.
    fn decode(&mut self, mut bytes: &[u8]) -> io::Result<()> {
        loop {
            let (valid, bad) = match std::str::from_utf8(bytes) {
                Ok(_) => (bytes.len(), 0),
                Err(e) => match e.error_len() {
                    Some(n) => (e.valid_up_to(), n),
                    None if self.ended => (e.valid_up_to(), bytes.len() - e.valid_up_to()),
                    None => {
                        self.carry = bytes[e.valid_up_to()..].to_vec();
                        (e.valid_up_to(), 0)
                    }
                },
            };
            for &byte in &bytes[..valid] {
                if byte == 0 {
                    return Err(io::Error::other(TextProblem::Nul { line: self.decoded_line }));
                }
                self.decoded_line += u64::from(byte == b'\n');
            }
            self.ready.extend_from_slice(&bytes[..valid]);
            if bad == 0 {
                return Ok(());
            }
            self.foreign_line.get_or_insert(self.decoded_line);
            for &byte in &bytes[valid..valid + bad] {
                let letter = match byte {
                    0x80..=0x9F => WINDOWS_1252[usize::from(byte - 0x80)],
                    _ => char::from(byte),
                };
                self.ready.extend_from_slice(letter.encode_utf8(&mut [0; 4]).as_bytes());
            }
            bytes = &bytes[valid + bad..];
        }
    }
}

/// What a file is whose first bytes say that it is not text.
fn other_kind_of_file(head: &[u8]) -> Option<&'static str> {
    let starts = |mark: &[u8]| head.starts_with(mark);
    if starts(b"\xFF\xFE") || starts(b"\xFE\xFF") {
        Some("text in UTF-16")
    } else if starts(b"PK\x03\x04") {
        Some("a zip archive (a workbook, a KMZ or a zipped layer)")
    } else if starts(b"\x1F\x8B") {
        Some("a gzip archive")
    } else if starts(b"SQLi") {
        Some("a SQLite database or GeoPackage")
    } else if starts(b"II*\0") || starts(b"MM\0*") || starts(b"II+\0") || starts(b"MM\0+") {
        Some("a TIFF raster")
    } else {
        None
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn all(bytes: &[u8]) -> (String, Text) {
        let mut text = Text::new(io::Cursor::new(bytes.to_vec()));
        let mut out = String::new();
        text.read_to_string(&mut out).unwrap();
        (out, text)
    }

    #[test]
    fn byte_order_mark_goes_and_windows_1252_is_read() {
        let (out, text) = all(b"\xEF\xBB\xBFa\nb\xF1\x92\n\xC3\xA9");
        assert_eq!(out, "a\nbñ’\né");
        assert_eq!(text.foreign_line(), Some(2));
        assert_eq!(text.line(), 3);
    }

    #[test]
    fn hash_is_of_the_bytes_on_disk() {
        let (_, text) = all(b"abc");
        // SHA-256 of "abc": FIPS 180-4 example (published).
        let file = text.finish("x").unwrap();
        assert_eq!(file.sha256, "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
        assert_eq!(file.bytes, 3);
    }

    #[test]
    fn characters_across_chunks_survive() {
        let long = "é".repeat(CHUNK);
        let mut bytes = b"x".to_vec();
        bytes.extend_from_slice(long.as_bytes());
        let (out, text) = all(&bytes);
        assert_eq!(out.len(), bytes.len());
        assert_eq!(text.foreign_line(), None);
    }
}
