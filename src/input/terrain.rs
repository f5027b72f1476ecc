//! Elevation raster: a single-band GeoTIFF to an array of heights with its place on the ground.
//!
//! Accepted: strips or tiles; plain, deflate, LZW, with predictors (by `tiff`); integer or float cells; longitude and
//! latitude on WGS 84 or NAD 83, or UTM on either; north up; heights in metres. Key 1025 says whether the tie point is a
//! cell's corner or its centre (half a cell of shift). Anything else is refused with what was found and what to do.
//! Keys and codes: OGC GeoTIFF 1.1 (OGC 19-008r4), the EPSG register (recalled).

use std::fs::File;
use std::io::BufReader;
use std::path::Path;

use tiff::decoder::{Decoder, DecodingResult, Limits};
use tiff::tags::Tag;

use super::terrain_lzw;
use crate::diagnostic::{Diagnostic, Severity};
use crate::rockfall::terrain::{CellFrame, Terrain, TerrainCrs, TerrainError};

/// Most cells that are read: 600 MB of heights.
pub const CELLS_MAX: u64 = 150_000_000;
/// Heights outside this range are no ground, m (the lowest and highest dry ground, widened).
const GROUND_M: (f64, f64) = (-500.0, 9000.0);
/// Cells up to this size show the ridges and benches that stop a block, m (the method's own limit).
const CELL_FINE_M: f64 = 10.0;

/// Why a raster cannot be used.
#[derive(Debug, thiserror::Error)]
pub enum TerrainReadError {
    /// The file cannot be opened.
    #[error("{file}: the file cannot be opened: {source}")]
    Open {
        /// The file.
        file: String,
        /// Why.
        source: std::io::Error,
    },
    /// It is no TIFF, is cut short, or uses an encoding the reader does not know.
    #[error(
        "{file}: not readable as a GeoTIFF: {source}; re-export it as a single-band GeoTIFF, deflate or uncompressed"
    )]
    Decode {
        /// The file.
        file: String,
        /// Why.
        source: tiff::TiffError,
    },
    /// It is a TIFF, but not one that can be used.
    #[error("{file}: {found}; expected {expected}")]
    Unusable {
        /// The file.
        file: String,
        /// What was found.
        found: String,
        /// What was expected and what to do.
        expected: &'static str,
    },
    /// The projection library refuses.
    #[error("{file}: {source}")]
    Place {
        /// The file.
        file: String,
        /// Why.
        source: TerrainError,
    },
}

/// A raster and what was remarked while reading it.
#[derive(Debug)]
pub struct TerrainFile {
    /// The raster.
    pub terrain: Terrain,
    /// Remarks.
    pub findings: Vec<Diagnostic>,
}

const CRS_EXPECTED: &str = "longitude/latitude on WGS 84 (EPSG:4326) or NAD 83 (EPSG:4269), or UTM on either (EPSG:326xx, 327xx, \
                            269xx); reproject the raster";

/// Reads a raster.
///
/// # Errors
/// [`TerrainReadError`] when it cannot be opened, decoded, placed, or is larger than [`CELLS_MAX`].
pub fn read_terrain(path: &Path) -> Result<TerrainFile, TerrainReadError> {
    let file = path.display().to_string();
    let source = File::open(path).map_err(|source| TerrainReadError::Open { file: file.clone(), source })?;
    let decode = |source| TerrainReadError::Decode { file: file.clone(), source };
    let unusable = |found: String, expected| TerrainReadError::Unusable { file: file.clone(), found, expected };

    let mut limits = Limits::default();
    limits.decoding_buffer_size = CELLS_MAX as usize * 8;
    limits.intermediate_buffer_size = CELLS_MAX as usize * 8;
    limits.ifd_value_size = 64 << 20;
    let mut decoder = Decoder::new(BufReader::new(source)).map_err(decode)?.with_limits(limits);
    let (columns, rows) = decoder.dimensions().map_err(decode)?;
    let cells = u64::from(columns) * u64::from(rows);
    if cells == 0 || cells > CELLS_MAX {
        return Err(unusable(
            format!("the raster has {columns} x {rows} cells"),
            "1 to 150 million cells; cut it to the burn and its trails",
        ));
    }
    let bands = decoder.find_tag_unsigned::<u16>(Tag::SamplesPerPixel).map_err(decode)?.unwrap_or(1);
    if bands != 1 {
        return Err(unusable(
            format!("the raster has {bands} bands"),
            "one band of heights; export the elevation band alone",
        ));
    }

    let doubles = |decoder: &mut Decoder<_>, tag| -> Result<Option<Vec<f64>>, TerrainReadError> {
        match decoder.find_tag(tag).map_err(decode)? {
            Some(value) => value.into_f64_vec().map(Some).map_err(decode),
            None => Ok(None),
        }
    };
    let keys = match decoder.find_tag_unsigned_vec::<u16>(Tag::GeoKeyDirectoryTag).map_err(decode)? {
        Some(directory) => GeoKeys::parse(&directory),
        None => return Err(unusable("the TIFF carries no GeoTIFF keys".to_owned(), CRS_EXPECTED)),
    };
    let crs = keys.crs().map_err(|found| unusable(found, CRS_EXPECTED))?;
    let band_note = text_tag(&mut decoder, Tag::Unknown(GDAL_METADATA));
    if keys.heights_in_feet() || band_note.as_deref().is_some_and(says_feet) {
        return Err(unusable("the heights are in feet".to_owned(), "heights in metres; convert the raster"));
    }
    if band_note.as_deref().is_some_and(says_scaled) {
        return Err(unusable(
            "the heights carry a scale or an offset".to_owned(),
            "plain heights in metres; export the raster with the scale applied",
        ));
    }
    let scale = doubles(&mut decoder, Tag::ModelPixelScaleTag)?;
    let tie = doubles(&mut decoder, Tag::ModelTiepointTag)?;
    let matrix = doubles(&mut decoder, Tag::ModelTransformationTag)?;
    let mut frame = frame_of(scale.as_deref(), tie.as_deref(), matrix.as_deref()).map_err(|found| {
        unusable(found, "a north-up raster with a tie point and a cell size; re-export it north up")
    })?;
    if keys.point_cells {
        frame.west -= 0.5 * frame.width;
        frame.north += 0.5 * frame.height;
    }
    check_extent(&frame, crs, columns, rows).map_err(|found| unusable(found, CRS_EXPECTED))?;

    let nodata = match text_tag(&mut decoder, Tag::GdalNodata) {
        Some(text) => {
            let text = text.trim_matches(|c: char| c.is_whitespace() || c == '\0').to_owned();
            Some(text.parse::<f64>().map_err(|_| {
                unusable(format!("the no-data value is {text:?}"), "a number; set it again and re-export")
            })?)
        }
        None => None,
    };
    let compression = decoder.find_tag_unsigned::<u16>(Tag::Compression).map_err(decode)?;
    let image = if compression == Some(terrain_lzw::LZW) {
        terrain_lzw::read_cells(&mut decoder).map_err(decode)?.map(DecodingResult::F64)
    } else {
        Some(decoder.read_image().map_err(decode)?)
    };
    let Some(heights) = image.and_then(|cells| to_heights(cells, nodata)) else {
        return Err(unusable(
            "the cells are neither plain integers nor plain floats".to_owned(),
            "integer or float heights; re-export the raster",
        ));
    };
    let Heights { values, missing, implausible } = heights;
    if missing + implausible == cells {
        return Err(unusable("no cell holds a height".to_owned(), "heights in metres; check the no-data value"));
    }
    let terrain = Terrain::new(columns as usize, rows as usize, frame, crs, values)
        .map_err(|source| TerrainReadError::Place { file: file.clone(), source })?;
    let mut findings = Vec::new();
    if implausible > 0 {
        findings.push(
            Diagnostic::new(Severity::Warning, "raster_heights_implausible", file.clone())
                .about("raster", None)
                .found(format!("{implausible} cells hold heights outside {} to {} m", GROUND_M.0, GROUND_M.1))
                .expected("ground heights in metres or the declared no-data value")
                .remedy("they were taken as no data; declare the no-data value"),
        );
    }
    if terrain.cell_m() > CELL_FINE_M * 1.001 {
        findings.push(
            Diagnostic::new(Severity::Warning, "raster_coarse", file)
                .about("raster", None)
                .found(format!("cells are {:.0} m wide", terrain.cell_m()))
                .expected("10 m or finer")
                .remedy("ridges and benches narrower than a cell or two are not seen; use a finer raster"),
        );
    }
    Ok(TerrainFile { terrain, findings })
}

/// Tag of the raster library's band notes (unit, scale, offset), XML.
const GDAL_METADATA: u16 = 42112;

fn text_tag<R: std::io::Read + std::io::Seek>(decoder: &mut Decoder<R>, tag: Tag) -> Option<String> {
    decoder.get_tag_ascii_string(tag).ok()
}

fn says_feet(note: &str) -> bool {
    note.to_ascii_lowercase().split("<item").any(|item| {
        item.contains("unittype") && (item.contains(">ft") || item.contains("foot") || item.contains("feet"))
    })
}

fn says_scaled(note: &str) -> bool {
    note.to_ascii_lowercase().split("<item").any(|item| {
        let value = item.split('>').nth(1).and_then(|v| v.split('<').next()).and_then(|v| v.trim().parse::<f64>().ok());
        (item.contains("role=\"scale\"") && value != Some(1.0))
            || (item.contains("role=\"offset\"") && value != Some(0.0))
    })
}

/// The keys that matter here.
#[derive(Debug, Default, PartialEq)]
struct GeoKeys {
    model: u16,
    point_cells: bool,
    geographic: u16,
    projected: u16,
    linear_unit: u16,
    vertical_unit: u16,
}

/// US survey and international foot in the EPSG register.
const FEET: [u16; 2] = [9002, 9003];

impl GeoKeys {
    /// Directory of quadruples (key, tag, count, value) after a header of four; only values held in place matter here.
    fn parse(directory: &[u16]) -> Self {
        let mut keys = GeoKeys::default();
        for entry in directory.chunks_exact(4).skip(1) {
            if entry[1] != 0 {
                continue;
            }
            match entry[0] {
                1024 => keys.model = entry[3],
                1025 => keys.point_cells = entry[3] == 2,
                2048 => keys.geographic = entry[3],
                3072 => keys.projected = entry[3],
                3076 => keys.linear_unit = entry[3],
                4099 => keys.vertical_unit = entry[3],
                _ => {}
            }
        }
        keys
    }

    fn heights_in_feet(&self) -> bool {
        FEET.contains(&self.vertical_unit)
    }

    fn crs(&self) -> Result<TerrainCrs, String> {
        if FEET.contains(&self.linear_unit) {
            return Err("the coordinate system is in feet".to_owned());
        }
        let utm = |zone: u16, south: bool| Ok(TerrainCrs::Utm { zone: zone as u8, south });
        match (self.model, self.projected, self.geographic) {
            (1, code @ 32601..=32660, _) => utm(code - 32600, false),
            (1, code @ 32701..=32760, _) => utm(code - 32700, true),
            (1, code @ 26901..=26923, _) => utm(code - 26900, false),
            // NAD 83 (2011), zones 1 to 19 north.
            (1, code @ 6330..=6348, _) => utm(code - 6329, false),
            (1, 0 | 32767, _) => Err("the projected coordinate system has no EPSG code".to_owned()),
            (1, code, _) => Err(format!("the coordinate system is EPSG:{code}")),
            (2, _, 4326 | 4269 | 6318 | 4979) => Ok(TerrainCrs::Geographic),
            (2, _, 0 | 32767) => Err("the geographic coordinate system has no EPSG code".to_owned()),
            (2, _, code) => Err(format!("the coordinate system is EPSG:{code}")),
            _ => Err("the coordinate system is not stated".to_owned()),
        }
    }
}

fn frame_of(scale: Option<&[f64]>, tie: Option<&[f64]>, matrix: Option<&[f64]>) -> Result<CellFrame, String> {
    let frame = match (scale, tie, matrix) {
        (Some([width, height, ..]), Some([i, j, _, x, y, ..]), _) => {
            CellFrame { west: x - i * width, north: y + j * height, width: *width, height: *height }
        }
        (_, _, Some(m)) if m.len() == 16 => {
            if m[1] != 0.0 || m[4] != 0.0 {
                return Err("the raster is rotated".to_owned());
            }
            CellFrame { west: m[3], north: m[7], width: m[0], height: -m[5] }
        }
        _ => return Err("the raster has no place on the ground".to_owned()),
    };
    let finite = [frame.west, frame.north, frame.width, frame.height].iter().all(|v| v.is_finite());
    if !finite || frame.width <= 0.0 || frame.height <= 0.0 {
        return Err("the raster is flipped or its cells have no size".to_owned());
    }
    Ok(frame)
}

fn check_extent(frame: &CellFrame, crs: TerrainCrs, columns: u32, rows: u32) -> Result<(), String> {
    if crs != TerrainCrs::Geographic {
        return Ok(());
    }
    let south = frame.north - frame.height * f64::from(rows);
    let east = frame.west + frame.width * f64::from(columns);
    let half = 0.5 * frame.height;
    if frame.north > 90.0 + half || south < -90.0 - half || frame.west < -360.0 || east > 540.0 {
        return Err(format!(
            "the raster says degrees but reaches from {:.1}, {south:.1} to {east:.1}, {:.1}",
            frame.west, frame.north
        ));
    }
    Ok(())
}

/// Cells as heights, those without data as NaN.
struct Heights {
    values: Vec<f32>,
    missing: u64,
    implausible: u64,
}

fn to_heights(image: DecodingResult, nodata: Option<f64>) -> Option<Heights> {
    fn collect<T: Copy>(cells: Vec<T>, as_f64: impl Fn(T) -> f64, nodata: Option<f64>) -> Heights {
        let (mut missing, mut implausible) = (0, 0);
        let values = cells
            .into_iter()
            .map(|cell| {
                let h = as_f64(cell);
                // A no-data value that a float cell cannot hold exactly is compared as the cell holds it.
                if !h.is_finite() || nodata.is_some_and(|n| h == n || h == f64::from(n as f32)) {
                    missing += 1;
                    f32::NAN
                } else if h < GROUND_M.0 || h > GROUND_M.1 {
                    implausible += 1;
                    f32::NAN
                } else {
                    h as f32
                }
            })
            .collect();
        Heights { values, missing, implausible }
    }
    Some(match image {
        DecodingResult::U8(v) => collect(v, f64::from, nodata),
        DecodingResult::U16(v) => collect(v, f64::from, nodata),
        DecodingResult::U32(v) => collect(v, f64::from, nodata),
        DecodingResult::U64(v) => collect(v, |x| x as f64, nodata),
        DecodingResult::I8(v) => collect(v, f64::from, nodata),
        DecodingResult::I16(v) => collect(v, f64::from, nodata),
        DecodingResult::I32(v) => collect(v, f64::from, nodata),
        DecodingResult::I64(v) => collect(v, |x| x as f64, nodata),
        DecodingResult::F32(v) => collect(v, f64::from, nodata),
        DecodingResult::F64(v) => collect(v, |x| x, nodata),
        DecodingResult::F16(_) => return None,
    })
}
