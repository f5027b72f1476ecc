//! An elevation raster as an array with its place on the ground: heights, slope and downslope bearing.
//!
//! Height: bilinear between cell centres. Slope and bearing: Horn's third-order differences (Horn 1981, Proc. IEEE 69, 14;
//! recalled) on a 3 x 3 stencil one cell wide, laid along true east and north, so that bearings are from true north on
//! any grid. A point whose interpolation touches a cell without data has no height. Within the outer half cell the edge
//! value is carried on.
//!
//! Columns run east, rows run south. Heights in metres above the raster's own datum; NAD 83 is taken as WGS 84 (they
//! differ by 1 to 2 m on the ground, under a cell). Does no reading of files: `input::terrain` does.

use proj4rs::proj::Proj;

/// The raster's coordinate system.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum TerrainCrs {
    /// Longitude and latitude, degrees.
    Geographic,
    /// Universal Transverse Mercator, metres.
    Utm {
        /// Zone, 1 to 60.
        zone: u8,
        /// Whether the zone's false northing is the southern one.
        south: bool,
    },
}

/// Where the cells lie: outer corner of the first cell and cell sizes, in the raster's units.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct CellFrame {
    /// Western edge.
    pub west: f64,
    /// Northern edge.
    pub north: f64,
    /// Cell width, positive.
    pub width: f64,
    /// Cell height, positive.
    pub height: f64,
}

/// Slope and fall line of the ground.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Fall {
    /// Slope, degrees.
    pub slope_deg: f64,
    /// Downslope bearing from true north, degrees clockwise; `None` on ground flatter than [`FLAT_DEG`].
    pub bearing_deg: Option<f64>,
}

/// Slope under which a downslope bearing means nothing, degrees (assumption).
pub const FLAT_DEG: f64 = 0.5;

/// Semi-axis of WGS 84, m, and first eccentricity squared (NIMA TR8350.2).
const WGS84_A_M: f64 = 6_378_137.0;
const WGS84_E2: f64 = 6.694_379_990_141_316e-3;

/// Metres per degree of latitude and of longitude on the WGS 84 ellipsoid.
///
/// ```
/// let (north, east) = spallcast::rockfall::terrain::metres_per_degree(39.55);
/// assert!((north - 111025.998).abs() < 1e-3 && (east - 85951.758).abs() < 1e-3);
/// ```
pub fn metres_per_degree(lat_deg: f64) -> (f64, f64) {
    let lat = lat_deg.to_radians();
    let (sin, cos) = (libm::sin(lat), libm::cos(lat));
    let w2 = 1.0 - WGS84_E2 * sin * sin;
    let prime_m = WGS84_A_M / w2.sqrt();
    let meridian_m = prime_m * (1.0 - WGS84_E2) / w2;
    (meridian_m.to_radians(), (prime_m * cos).to_radians())
}

/// An elevation raster.
#[derive(Debug)]
pub struct Terrain {
    columns: usize,
    rows: usize,
    frame: CellFrame,
    crs: TerrainCrs,
    heights_m: Vec<f32>,
    projection: Option<(Proj, Proj)>,
}

/// Why a raster cannot be placed.
#[derive(Debug, thiserror::Error)]
pub enum TerrainError {
    /// Array and size disagree, or a size is not positive.
    #[error("the raster has {found} heights for {columns} columns and {rows} rows")]
    Shape {
        /// Heights given.
        found: usize,
        /// Columns.
        columns: usize,
        /// Rows.
        rows: usize,
    },
    /// The projection library refuses.
    #[error("the projection could not be set up: {0}")]
    Projection(String),
}

/// The raster about one point: cells per metre east and north, so that rays need no projection of their own.
#[derive(Debug, Clone, Copy)]
pub struct LocalGrid {
    column: f64,
    row: f64,
    column_per_east_m: f64,
    column_per_north_m: f64,
    row_per_east_m: f64,
    row_per_north_m: f64,
}

impl LocalGrid {
    /// Column and row (cell centres at whole numbers) of a point so many metres east and north.
    pub fn cell(&self, east_m: f64, north_m: f64) -> (f64, f64) {
        (
            self.column + self.column_per_east_m * east_m + self.column_per_north_m * north_m,
            self.row + self.row_per_east_m * east_m + self.row_per_north_m * north_m,
        )
    }
}

/// Step over which the local grid is measured, m.
const LOCAL_STEP_M: f64 = 200.0;

impl Terrain {
    /// Places an array of heights `[rows x columns]`, north-western cell first; NaN where there is no data.
    pub fn new(
        columns: usize,
        rows: usize,
        frame: CellFrame,
        crs: TerrainCrs,
        heights_m: Vec<f32>,
    ) -> Result<Self, TerrainError> {
        if columns == 0 || rows == 0 || heights_m.len() != columns * rows || frame.width <= 0.0 || frame.height <= 0.0 {
            return Err(TerrainError::Shape { found: heights_m.len(), columns, rows });
        }
        let projection = match crs {
            TerrainCrs::Geographic => None,
            TerrainCrs::Utm { zone, south } => {
                let south = if south { " +south" } else { "" };
                let text = format!("+proj=utm +zone={zone}{south} +ellps=WGS84 +units=m");
                let make =
                    |text: &str| Proj::from_proj_string(text).map_err(|e| TerrainError::Projection(format!("{e:?}")));
                Some((make("+proj=longlat +ellps=WGS84")?, make(&text)?))
            }
        };
        Ok(Terrain { columns, rows, frame, crs, heights_m, projection })
    }

    /// Columns and rows.
    pub fn shape(&self) -> (usize, usize) {
        (self.columns, self.rows)
    }

    /// Coordinate system.
    pub fn crs(&self) -> TerrainCrs {
        self.crs
    }

    /// Where the cells lie.
    pub fn frame(&self) -> CellFrame {
        self.frame
    }

    /// Larger side of a cell on the ground at the raster's middle, m.
    pub fn cell_m(&self) -> f64 {
        match self.crs {
            TerrainCrs::Utm { .. } => self.frame.width.max(self.frame.height),
            TerrainCrs::Geographic => {
                let middle = self.frame.north - 0.5 * self.rows as f64 * self.frame.height;
                let (north, east) = metres_per_degree(middle);
                (self.frame.width * east).max(self.frame.height * north)
            }
        }
    }

    /// Column and row of a point, cell centres at whole numbers; `None` where the projection does not reach.
    pub fn to_cell(&self, lon_deg: f64, lat_deg: f64) -> Option<(f64, f64)> {
        let (x, y) = match &self.projection {
            None => {
                // Rasters across the antimeridian go on past 180 or below -180.
                let middle = self.frame.west + 0.5 * self.columns as f64 * self.frame.width;
                let turns = ((middle - lon_deg) / 360.0).round();
                (lon_deg + 360.0 * turns, lat_deg)
            }
            Some((from, to)) => {
                let mut point = (lon_deg.to_radians(), lat_deg.to_radians(), 0.0);
                proj4rs::transform::transform(from, to, &mut point).ok()?;
                (point.0, point.1)
            }
        };
        (x.is_finite() && y.is_finite())
            .then(|| ((x - self.frame.west) / self.frame.width - 0.5, (self.frame.north - y) / self.frame.height - 0.5))
    }

    /// Height at a column and row, bilinear; `None` outside and beside cells without data.
    pub fn height_at_cell(&self, column: f64, row: f64) -> Option<f64> {
        let inside = |v: f64, n: usize| v >= -0.5 && v <= n as f64 - 0.5;
        if !(inside(column, self.columns) && inside(row, self.rows)) {
            return None;
        }
        let column = column.clamp(0.0, (self.columns - 1) as f64);
        let row = row.clamp(0.0, (self.rows - 1) as f64);
        let (c0, r0) = (column as usize, row as usize);
        let (fc, fr) = (column - c0 as f64, row - r0 as f64);
        let value = |c: usize, r: usize, weight: f64| -> f64 {
            // A neighbour of no weight may be missing.
            if weight == 0.0 { 0.0 } else { weight * f64::from(self.heights_m[r * self.columns + c]) }
        };
        let (c1, r1) = ((c0 + 1).min(self.columns - 1), (r0 + 1).min(self.rows - 1));
        let height = value(c0, r0, (1.0 - fc) * (1.0 - fr))
            + value(c1, r0, fc * (1.0 - fr))
            + value(c0, r1, (1.0 - fc) * fr)
            + value(c1, r1, fc * fr);
        (!height.is_nan()).then_some(height)
    }

    /// Height at a point, m.
    pub fn height(&self, lon_deg: f64, lat_deg: f64) -> Option<f64> {
        let (column, row) = self.to_cell(lon_deg, lat_deg)?;
        self.height_at_cell(column, row)
    }

    /// The raster about a point, for metres east and north of it. Good to a hundredth of a cell within 2 km.
    pub fn local(&self, lon_deg: f64, lat_deg: f64) -> Option<LocalGrid> {
        let (north, east) = metres_per_degree(lat_deg);
        let (dlon, dlat) = (LOCAL_STEP_M / east, LOCAL_STEP_M / north);
        let (column, row) = self.to_cell(lon_deg, lat_deg)?;
        let (e1, w1) = (self.to_cell(lon_deg + dlon, lat_deg)?, self.to_cell(lon_deg - dlon, lat_deg)?);
        let (n1, s1) = (self.to_cell(lon_deg, lat_deg + dlat)?, self.to_cell(lon_deg, lat_deg - dlat)?);
        let span = 2.0 * LOCAL_STEP_M;
        Some(LocalGrid {
            column,
            row,
            column_per_east_m: (e1.0 - w1.0) / span,
            column_per_north_m: (n1.0 - s1.0) / span,
            row_per_east_m: (e1.1 - w1.1) / span,
            row_per_north_m: (n1.1 - s1.1) / span,
        })
    }

    /// Slope and downslope bearing at a point; `None` outside, at the edge and beside cells without data.
    pub fn fall(&self, lon_deg: f64, lat_deg: f64) -> Option<Fall> {
        let grid = self.local(lon_deg, lat_deg)?;
        let step_m = self.cell_m();
        let mut z = [[0.0; 3]; 3];
        for (j, line) in z.iter_mut().enumerate() {
            for (i, height) in line.iter_mut().enumerate() {
                let (column, row) = grid.cell((i as f64 - 1.0) * step_m, (1.0 - j as f64) * step_m);
                *height = self.height_at_cell(column, row)?;
            }
        }
        let rise_east = (z[0][2] + 2.0 * z[1][2] + z[2][2] - z[0][0] - 2.0 * z[1][0] - z[2][0]) / (8.0 * step_m);
        let rise_north = (z[0][0] + 2.0 * z[0][1] + z[0][2] - z[2][0] - 2.0 * z[2][1] - z[2][2]) / (8.0 * step_m);
        let slope_deg = libm::atan((rise_east * rise_east + rise_north * rise_north).sqrt()).to_degrees();
        let bearing = libm::atan2(-rise_east, -rise_north).to_degrees().rem_euclid(360.0);
        Some(Fall { slope_deg, bearing_deg: (slope_deg >= FLAT_DEG).then_some(bearing) })
    }
}
