//! Reading and sampling of elevation rasters against rasterio (GDAL), and refusals.
//!
//! Rasters: `fixtures/terrain`; heights: `tests/reference/raster_samples.csv` by `raster.py`, rasterio 1.4.4, pyproj 3.7.2.

use std::path::{Path, PathBuf};

use spallcast::input::terrain::{TerrainFile, read_terrain};
use spallcast::rockfall::terrain::TerrainCrs;

/// Heights are held as f32 (.06 mm at 1500 m); positions agree to .1 mm on slopes up to 5 in 1.
const HEIGHT_TOLERANCE_M: f64 = 2e-3;

fn fixture(name: &str) -> PathBuf {
    Path::new("fixtures/terrain").join(format!("{name}.tif"))
}

fn read(name: &str) -> TerrainFile {
    read_terrain(&fixture(name)).unwrap_or_else(|e| panic!("{name}: {e}"))
}

#[test]
fn heights_agree_with_rasterio() {
    let text = std::fs::read_to_string("tests/reference/raster_samples.csv").unwrap();
    let mut reader = csv::ReaderBuilder::new().comment(Some(b'#')).from_reader(text.as_bytes());
    let (mut rows, mut gaps) = (0, 0);
    let mut open: Option<(String, TerrainFile)> = None;
    for row in reader.deserialize::<(String, f64, f64, Option<f64>)>() {
        let (name, lon, lat, expected) = row.unwrap();
        if open.as_ref().is_none_or(|(n, _)| *n != name) {
            open = Some((name.clone(), read(&name)));
        }
        let found = open.as_ref().unwrap().1.terrain.height(lon, lat);
        match (found, expected) {
            (Some(h), Some(e)) => assert!((h - e).abs() < HEIGHT_TOLERANCE_M, "{name} {lon} {lat}: {h} against {e}"),
            (None, None) => gaps += 1,
            other => panic!("{name} {lon} {lat}: {other:?}"),
        }
        rows += 1;
    }
    assert_eq!(rows, 8 * 16);
    assert!(gaps >= 4, "the gaps were not sampled: {gaps}");
}

#[test]
fn systems_are_recognised() {
    let crs = |name: &str| read(name).terrain.crs();
    assert_eq!(crs("utm11n_strips_float32"), TerrainCrs::Utm { zone: 11, south: false });
    assert_eq!(crs("utm11n_tiles_deflate_float32"), TerrainCrs::Utm { zone: 11, south: false });
    assert_eq!(crs("utm19s_tiles_lzw_int16"), TerrainCrs::Utm { zone: 19, south: true });
    assert_eq!(crs("degrees_nad83_lzw_int32"), TerrainCrs::Geographic);
    let raster = read("degrees_strips_deflate_float64").terrain;
    assert_eq!(raster.shape(), (60, 48));
    // A third of an arc second of latitude is 10.3 m.
    assert!((raster.cell_m() - 10.28).abs() < 0.02);
    assert_eq!(raster.height(10.0, 50.0), None, "outside");
}

/// Key 1025: the same file read as corners would be half a cell off.
#[test]
fn point_cells_shift_by_half_a_cell() {
    let frame = read("utm33n_point_uint16").terrain.frame();
    // rasterio reports the corner it was told, 500000; the library writes the tie point at the centre, 500005.
    assert_eq!((frame.west, frame.north), (500000.0, 5200000.0));
}

#[test]
fn refusals_name_the_cause() {
    let cases = [
        ("refused_web_mercator", "EPSG:3857"),
        ("refused_two_bands", "2 bands"),
        ("refused_rotated", "rotated"),
        ("refused_feet", "feet"),
        ("refused_no_crs", "expected"),
    ];
    for (name, word) in cases {
        let message = read_terrain(&fixture(name)).expect_err(name).to_string();
        assert!(message.contains(word), "{name}: {message}");
        assert!(message.contains(&format!("{name}.tif")), "{message}");
    }
    assert!(read_terrain(Path::new("fixtures/terrain/nowhere.tif")).unwrap_err().to_string().contains("opened"));
    assert!(read_terrain(Path::new("Cargo.toml")).unwrap_err().to_string().contains("GeoTIFF"));
}

#[test]
fn a_file_cut_short_is_refused() {
    let whole = std::fs::read(fixture("utm11n_strips_float32")).unwrap();
    let folder = tempfile::tempdir().unwrap();
    for keep in [10, 200, whole.len() / 2, whole.len() - 3] {
        let path = folder.path().join("cut.tif");
        std::fs::write(&path, &whole[..keep]).unwrap();
        assert!(read_terrain(&path).is_err(), "{keep} bytes of {}", whole.len());
    }
}
