//! LZW chunks of an elevation raster.
//!
//! `tiff` 0.11 gives up on LZW tiles that overhang the raster's edge and on chunks without an end code ("no lzw end
//! code found", its issue 395); both come from common tools. So LZW chunks are expanded here, by the same decoder
//! (`weezl`), up to the bytes that the chunk must hold; predictors 1, 2 and 3 are undone as TIFF 6.0 section 14 and
//! Adobe's TIFF technical note 3 (2005; recalled) define them.

use std::io::{Read, Seek, SeekFrom};

use tiff::decoder::Decoder;
use tiff::tags::{ByteOrder, Tag};
use tiff::{TiffError, TiffFormatError, TiffResult};

/// TIFF compression code of LZW.
pub(super) const LZW: u16 = 5;
/// Most bytes of one expanded chunk.
const CHUNK_BYTES_MAX: u64 = 1 << 30;

fn damaged(what: &str) -> TiffError {
    TiffError::FormatError(TiffFormatError::CompressedDataCorrupt(what.to_owned()))
}

/// Reads the cells of a single-band LZW raster, row by row from the north-west; `None` where the cells are of a kind
/// that is no height.
pub(super) fn read_cells<R: Read + Seek>(decoder: &mut Decoder<R>) -> TiffResult<Option<Vec<f64>>> {
    let (columns, rows) = decoder.dimensions()?;
    let bits = decoder.find_tag_unsigned::<u16>(Tag::BitsPerSample)?.unwrap_or(1);
    let format = decoder.find_tag_unsigned::<u16>(Tag::SampleFormat)?.unwrap_or(1);
    let predictor = decoder.find_tag_unsigned::<u16>(Tag::Predictor)?.unwrap_or(1);
    let big = decoder.byte_order() == ByteOrder::BigEndian;
    let Some(cell) = CellKind::new(bits, format) else { return Ok(None) };
    let tile_width = decoder.find_tag_unsigned::<u32>(Tag::TileWidth)?;
    let (width, height, offsets, counts) = match tile_width {
        Some(width) => (width, decoder.get_tag_u32(Tag::TileLength)?, Tag::TileOffsets, Tag::TileByteCounts),
        None => {
            let height = decoder.find_tag_unsigned::<u32>(Tag::RowsPerStrip)?.unwrap_or(rows).min(rows);
            (columns, height, Tag::StripOffsets, Tag::StripByteCounts)
        }
    };
    let offsets = decoder.get_tag_u64_vec(offsets)?;
    let counts = decoder.get_tag_u64_vec(counts)?;
    if width == 0 || height == 0 {
        return Err(damaged("a chunk has no size"));
    }
    let across = columns.div_ceil(width) as usize;
    let down = rows.div_ceil(height) as usize;
    if offsets.len() != across * down || counts.len() != offsets.len() {
        return Err(damaged("the number of chunks does not fit the raster's size"));
    }
    let row_bytes = width as usize * cell.bytes;
    if row_bytes as u64 * u64::from(height) > CHUNK_BYTES_MAX {
        return Err(damaged("a chunk is larger than 1 GB"));
    }
    let (columns, rows, width, height) = (columns as usize, rows as usize, width as usize, height as usize);
    let mut cells = vec![f64::NAN; columns * rows];
    for (chunk, (offset, count)) in offsets.into_iter().zip(counts).enumerate() {
        let (left, top) = (chunk % across * width, chunk / across * height);
        // A last strip holds only its own rows; a tile is always whole.
        let held = if tile_width.is_some() { height } else { height.min(rows - top) };
        if count == 0 {
            continue; // a sparse file leaves chunks without data out
        }
        let mut bytes = expand(decoder.inner(), offset, count, row_bytes * held)?;
        for (line, row) in bytes.chunks_exact_mut(row_bytes).enumerate().take(rows - top) {
            let planes = match predictor {
                1 => false,
                2 => {
                    cell.add_up(row, big);
                    false
                }
                3 if cell.float => {
                    (1..row.len()).for_each(|i| row[i] = row[i].wrapping_add(row[i - 1]));
                    true
                }
                _ => return Err(damaged("unknown predictor")),
            };
            let target = (top + line) * columns + left;
            for column in 0..width.min(columns - left) {
                let mut raw = [0u8; 8];
                for (b, byte) in raw.iter_mut().enumerate().take(cell.bytes) {
                    // Predictor 3 keeps the bytes of a row in planes, most significant first, whatever the file's order.
                    *byte = if planes { row[b * width + column] } else { row[column * cell.bytes + b] };
                }
                cells[target + column] = cell.value(&mut raw, big || planes);
            }
        }
    }
    Ok(Some(cells))
}

/// Expands one chunk to exactly `wanted` bytes; what follows them does not matter.
fn expand<R: Read + Seek>(source: &mut R, offset: u64, count: u64, wanted: usize) -> TiffResult<Vec<u8>> {
    let mut packed = Vec::new();
    source.seek(SeekFrom::Start(offset))?;
    source.by_ref().take(count).read_to_end(&mut packed)?;
    let mut lzw = weezl::decode::Decoder::with_tiff_size_switch(weezl::BitOrder::Msb, 8);
    let mut bytes = vec![0u8; wanted];
    let (mut read, mut written) = (0, 0);
    while written < wanted {
        let step = lzw.decode_bytes(&packed[read..], &mut bytes[written..]);
        read += step.consumed_in;
        written += step.consumed_out;
        let stuck = step.consumed_in == 0 && step.consumed_out == 0;
        if written < wanted && (stuck || step.status.is_err() || matches!(step.status, Ok(weezl::LzwStatus::Done))) {
            return Err(damaged("an LZW chunk is damaged or cut short"));
        }
    }
    Ok(bytes)
}

/// Size and kind of a cell.
struct CellKind {
    bytes: usize,
    float: bool,
    signed: bool,
}

impl CellKind {
    /// Sample format 1 unsigned, 2 signed, 3 float.
    fn new(bits: u16, format: u16) -> Option<Self> {
        let known = matches!((bits, format), (8 | 16 | 32 | 64, 1 | 2) | (32 | 64, 3));
        known.then(|| CellKind { bytes: usize::from(bits / 8), float: format == 3, signed: format == 2 })
    }

    /// Undoes predictor 2: each cell holds its difference from the one before, as a whole number.
    fn add_up(&self, row: &mut [u8], big: bool) {
        let n = self.bytes;
        let mut sum = 0u64;
        for cell in row.chunks_exact_mut(n) {
            let mut raw = [0u8; 8];
            for b in 0..n {
                raw[b] = if big { cell[n - 1 - b] } else { cell[b] };
            }
            sum = sum.wrapping_add(u64::from_le_bytes(raw));
            let out = sum.to_le_bytes();
            for b in 0..n {
                cell[b] = if big { out[n - 1 - b] } else { out[b] };
            }
        }
    }

    fn value(&self, raw: &mut [u8; 8], big: bool) -> f64 {
        if big {
            raw[..self.bytes].reverse();
        }
        let word = u64::from_le_bytes(*raw);
        match (self.bytes, self.float, self.signed) {
            (4, true, _) => f64::from(f32::from_bits(word as u32)),
            (_, true, _) => f64::from_bits(word),
            (_, _, false) => word as f64,
            (n, _, true) => {
                let shift = 64 - 8 * n as u32;
                (((word << shift) as i64) >> shift) as f64
            }
        }
    }
}
