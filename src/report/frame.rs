//! Longitude and latitude to metres on a plane about the middle of the data.
//!
//! Transverse Mercator on WGS 84, scale 1 on the meridian through the middle of the burns (of the boulders, without a
//! burn); done by `proj4rs`. The scale error x^2/(2 R^2) is 3e-5 at 50 km from the middle (Snyder 1987, eq. 8-11). Longitudes
//! are unwrapped about the first place, so data across the antimeridian lie together. Places farther than
//! [`FARTHEST_DEG`] from the middle have no place on the map.

use proj4rs::proj::Proj;

/// Farthest place from the middle that is drawn, degrees in longitude and latitude.
pub const FARTHEST_DEG: f64 = 5.0;

/// The plane of one page.
#[derive(Debug)]
pub struct Frame {
    /// Longitude of the middle, degrees.
    pub lon_deg: f64,
    /// Latitude of the middle, degrees.
    pub lat_deg: f64,
    plane: Option<(Proj, Proj)>,
}

/// A difference of longitudes brought to -180..180 degrees.
fn unwrapped(difference_deg: f64) -> f64 {
    difference_deg - 360.0 * (difference_deg / 360.0).round()
}

impl Frame {
    /// The plane about the middle of these places, longitude and latitude in degrees; about 0, 0 without any.
    pub fn about(places: impl Iterator<Item = (f64, f64)>) -> Frame {
        let mut first: Option<f64> = None;
        let (mut west, mut east, mut south, mut north) = (0.0_f64, 0.0_f64, f64::INFINITY, f64::NEG_INFINITY);
        for (lon, lat) in places.filter(|(lon, lat)| lon.is_finite() && lat.is_finite()) {
            let from_first = unwrapped(lon - *first.get_or_insert(lon));
            (west, east) = (west.min(from_first), east.max(from_first));
            (south, north) = (south.min(lat), north.max(lat));
        }
        let (lon_deg, lat_deg) = match first {
            Some(lon) => (unwrapped(lon + 0.5 * (west + east)), 0.5 * (south + north)),
            None => (0.0, 0.0),
        };
        let to = format!("+proj=tmerc +lat_0={lat_deg:.9} +lon_0=0 +k=1 +x_0=0 +y_0=0 +ellps=WGS84 +units=m +no_defs");
        let from = Proj::from_proj_string("+proj=longlat +ellps=WGS84 +no_defs").ok();
        Frame { lon_deg, lat_deg, plane: from.zip(Proj::from_proj_string(&to).ok()) }
    }

    /// Metres east and north of the middle; `None` too far away.
    pub fn metres(&self, lon_deg: f64, lat_deg: f64) -> Option<(f64, f64)> {
        let (from, to) = self.plane.as_ref()?;
        let east_deg = unwrapped(lon_deg - self.lon_deg);
        if !(east_deg.abs() <= FARTHEST_DEG && (lat_deg - self.lat_deg).abs() <= FARTHEST_DEG && lat_deg.abs() < 89.9) {
            return None;
        }
        let mut point = (east_deg.to_radians(), lat_deg.to_radians(), 0.0);
        proj4rs::transform::transform(from, to, &mut point).ok()?;
        (point.0.is_finite() && point.1.is_finite()).then_some((point.0, point.1))
    }
}
