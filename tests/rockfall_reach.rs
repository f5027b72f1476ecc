//! Reach integrals against quadrature written apart, ridge and bench against closed forms, geodesics against GeographicLib.

use std::f64::consts::PI;

use spallcast::ensemble::distribution::normal_cdf;
use spallcast::rockfall::profile::RayCaster;
use spallcast::rockfall::reach::{Bearings, ReachAngle, SeenPoint, SegmentReach, segment_reach};
use spallcast::rockfall::terrain::{CellFrame, Terrain, TerrainCrs, metres_per_degree};
use spallcast::settings::RockfallSettings;
use spallcast::site::{GroundAfter, Position};
use spallcast::trail::segments::{east_north_m, geodesic_m};

/// What is asked of a reach integral, absolute; the quadrature below is good to a tenth of it.
const INTEGRAL_TOLERANCE: f64 = 0.002;
const BLOCK_M: f64 = 1.0;

fn fall_line(centre_deg: f64) -> Bearings {
    Bearings::FallLine { centre_deg, sd_deg: 10.0, cut_deg: 30.0 }
}

fn intact() -> ReachAngle {
    ReachAngle::new(&RockfallSettings::default(), Some(GroundAfter::Intact))
}

/// A chain of points 5 m apart along straight legs.
fn chain(corners: &[(f64, f64, f64)]) -> Vec<SeenPoint> {
    let mut points = Vec::new();
    for w in corners.windows(2) {
        let ((e0, n0, d0), (e1, n1, d1)) = (w[0], w[1]);
        let steps = (((e1 - e0).hypot(n1 - n0)) / 5.0).ceil() as usize;
        for k in 0..=steps {
            let t = k as f64 / steps as f64;
            points.push(SeenPoint {
                east_m: e0 + t * (e1 - e0),
                north_m: n0 + t * (n1 - n0),
                drop_m: d0 + t * (d1 - d0),
            });
        }
    }
    points
}

/// P_seg by brute force, apart from the program: trail points every 2 mm, the best of each .02 deg of bearing, midpoints.
fn brute_force(points: &[SeenPoint], centre_deg: f64, mean_deg: f64, sd_deg: f64, height_sd_m: f64) -> f64 {
    const BINS: usize = 3000;
    let mut best = vec![0.0f64; BINS];
    for w in points.windows(2) {
        let length = (w[1].east_m - w[0].east_m).hypot(w[1].north_m - w[0].north_m);
        let steps = (length / 0.002).ceil() as usize;
        for k in 0..steps {
            let t = (k as f64 + 0.5) / steps as f64;
            let mix = |a: f64, b: f64| a + t * (b - a);
            let (e, n, drop) =
                (mix(w[0].east_m, w[1].east_m), mix(w[0].north_m, w[1].north_m), mix(w[0].drop_m, w[1].drop_m));
            let mut offset = e.atan2(n).to_degrees() - centre_deg;
            while offset < -180.0 {
                offset += 360.0;
            }
            while offset > 180.0 {
                offset -= 360.0;
            }
            if offset.abs() >= 30.0 {
                continue;
            }
            let d = e.hypot(n);
            let theta = (drop / d).atan();
            let widening = 180.0 / PI * theta.cos().powi(2) * height_sd_m / d;
            let p = normal_cdf((theta.to_degrees() - mean_deg) / sd_deg.hypot(widening));
            let bin = ((offset + 30.0) / 60.0 * BINS as f64) as usize;
            best[bin] = best[bin].max(p);
        }
    }
    (0..BINS)
        .map(|b| {
            let x = (-30.0 + 60.0 * (b as f64 + 0.5) / BINS as f64) / 10.0;
            (-0.5 * x * x).exp() / (2.0 * PI).sqrt() * 6.0 / BINS as f64 * best[b]
        })
        .sum()
}

#[test]
fn check_values() {
    // Phi at 27.5 deg: SciPy 1.17.1 norm.cdf(-1.625).
    assert!((intact().probability(27.5, 0.0) - 0.05208).abs() < 6e-6);
    // Trail 150 m out, 105 m below, 60 m either side: adaptive quadrature by SciPy 1.17.1.
    let trail = chain(&[(-60.0, 150.0, 105.0), (60.0, 150.0, 105.0)]);
    let p = segment_reach(&trail, &fall_line(0.0), &intact(), 0.0, BLOCK_M, None).p_segment;
    assert!((p - 0.54768).abs() < 2e-5, "{p}");
}

#[test]
fn integrals_agree_with_brute_force() {
    // Bearing, height error, corners (east, north, drop): switchbacks, a leg behind the boulder, edges within the cut,
    // a trail that crosses the fall line twice, near and far.
    type Case = (f64, f64, &'static [(f64, f64, f64)]);
    let cases: [Case; 7] = [
        (0.0, 0.0, &[(-60.0, 150.0, 105.0), (60.0, 150.0, 105.0)]),
        (170.0, 0.0, &[(-40.0, -90.0, 60.0), (30.0, -110.0, 75.0), (-30.0, -140.0, 100.0)]),
        (90.0, 5.0, &[(120.0, 3.0, 80.0), (120.0, 53.0, 78.0)]),
        (225.0, 10.0, &[(-200.0, -40.0, 120.0), (-100.0, -180.0, 130.0), (40.0, -160.0, 110.0)]),
        (350.0, 0.0, &[(30.0, -20.0, -5.0), (40.0, 60.0, 30.0), (-60.0, 80.0, 55.0)]),
        (45.0, 0.0, &[(10.0, 25.0, 18.0), (26.0, 12.0, 17.0)]),
        (180.0, 0.0, &[(25.0, -300.0, 190.0), (-25.0, -300.0, 190.0)]),
    ];
    let mut compared = 0;
    for (centre, height_sd, corners) in cases {
        let points = chain(corners);
        let p = segment_reach(&points, &fall_line(centre), &intact(), height_sd, BLOCK_M, None).p_segment;
        let expected = brute_force(&points, centre, 34.0, 4.0, height_sd);
        assert!(expected > 0.01, "a case that tests nothing: {expected}");
        assert!((p - expected).abs() < INTEGRAL_TOLERANCE, "bearing {centre}: {p} against {expected}");
        compared += 1;
    }
    assert_eq!(compared, 7);
}

#[test]
fn ground_factor_lengthens_the_reach() {
    let settings = RockfallSettings::default();
    let at = |ground| ReachAngle::new(&settings, ground).probability(30.0, 0.0);
    // Hand: mean atan(tan 34/1.17) = 29.964 deg, Phi(.036/4) = .50359.
    assert!((at(Some(GroundAfter::Bare)) - 0.50359).abs() < 5e-5);
    assert_eq!(at(None), at(Some(GroundAfter::Intact)));
    // Severe: SciPy 1.17.1 quad over triang(0.425, 1, 0.4) gives .53388; eight quantile midpoints are good to .003.
    assert!((at(Some(GroundAfter::Severe)) - 0.53388).abs() < 0.003, "{}", at(Some(GroundAfter::Severe)));
}

#[test]
fn unknown_bearing_is_even_over_a_quarter_circle() {
    let even = Bearings::Even { centre_deg: 0.0, half_width_deg: 45.0 };
    // A trail on a circle, so that the angle is the same everywhere: 20 deg of 90 at Phi(0) = .5.
    let drop = 100.0 * 34f64.to_radians().tan();
    let points: Vec<SeenPoint> = (0..=200)
        .map(|k| (-10.0 + 0.1 * f64::from(k)).to_radians())
        .map(|psi| SeenPoint { east_m: 100.0 * psi.sin(), north_m: 100.0 * psi.cos(), drop_m: drop })
        .collect();
    let p = segment_reach(&points, &even, &intact(), 0.0, BLOCK_M, None).p_segment;
    assert!((p - 0.5 * 20.0 / 90.0).abs() < 1e-4, "{p}");
}

#[test]
fn a_trail_straight_down_the_fall_line_is_as_wide_as_the_block() {
    let points = chain(&[(0.0, 50.0, 40.0), (0.0, 100.0, 80.0)]);
    let p = segment_reach(&points, &fall_line(0.0), &intact(), 0.0, 2.0, None).p_segment;
    // 2 m at 50 m is 2.29 deg of bearing: .0913 of falls; Phi((38.66 - 34)/4) = .8780.
    assert!((p - 0.0913 * 0.8780).abs() < 5e-4, "{p}");
    let under = chain(&[(-5.0, 0.2, 3.0), (5.0, 0.2, 3.0)]);
    assert_eq!(segment_reach(&under, &fall_line(0.0), &intact(), 0.0, 2.0, None).p_segment, 1.0);
    let above = chain(&[(-60.0, 100.0, -20.0), (60.0, 100.0, -20.0)]);
    assert!(segment_reach(&above, &fall_line(0.0), &intact(), 0.0, 2.0, None).p_segment < 1e-12);
}

const LON: f64 = -119.5;
const LAT: f64 = 37.7;

/// Ground as a function of metres east and north of the source, in degrees or in a UTM zone, 2 m cells.
fn raster(crs: TerrainCrs, height: impl Fn(f64, f64) -> f64) -> Terrain {
    const HALF: i32 = 200;
    let size = (2 * HALF + 1) as usize;
    let (north_m, east_m) = metres_per_degree(LAT);
    // Corner and cell in the raster's own units; the UTM case is far enough from its grid north to show a turn.
    let blank =
        Terrain::new(1, 1, CellFrame { west: 0.0, north: 0.0, width: 1.0, height: 1.0 }, crs, vec![0.0]).unwrap();
    let (x, y) = blank.to_cell(LON, LAT).map(|(c, r)| (c + 0.5, -(r + 0.5))).unwrap();
    let (width, height_cell) = match crs {
        TerrainCrs::Geographic => (2.0 / east_m, 2.0 / north_m),
        TerrainCrs::Utm { .. } => (2.0, 2.0),
    };
    let frame = CellFrame {
        west: x - (f64::from(HALF) + 0.5) * width,
        north: y + (f64::from(HALF) + 0.5) * height_cell,
        width,
        height: height_cell,
    };
    let empty = Terrain::new(size, size, frame, crs, vec![0.0; size * size]).unwrap();
    let grid = empty.local(LON, LAT).unwrap();
    // Columns and rows to metres: invert the local map by its two basis steps.
    let ((c0, r0), (ce, re), (cn, rn)) = (grid.cell(0.0, 0.0), grid.cell(1.0, 0.0), grid.cell(0.0, 1.0));
    let (a, b, c, d) = (ce - c0, cn - c0, re - r0, rn - r0);
    let det = a * d - b * c;
    let mut heights = Vec::with_capacity(size * size);
    for row in 0..size {
        for column in 0..size {
            let (dc, dr) = (column as f64 - c0, row as f64 - r0);
            heights.push(height((d * dc - b * dr) / det, (a * dr - c * dc) / det) as f32);
        }
    }
    Terrain::new(size, size, frame, crs, heights).unwrap()
}

const FRAMES: [TerrainCrs; 3] =
    [TerrainCrs::Geographic, TerrainCrs::Utm { zone: 11, south: false }, TerrainCrs::Utm { zone: 12, south: false }];

fn over(terrain: &Terrain, trail: &[SeenPoint], source_m: f64) -> SegmentReach {
    let rays = RayCaster::new(terrain, LON, LAT, source_m).unwrap();
    segment_reach(trail, &fall_line(180.0), &intact(), 0.0, BLOCK_M, Some(&rays))
}

#[test]
fn a_ridge_drops_its_far_side() {
    let trail = chain(&[(-60.0, -150.0, 105.0), (60.0, -150.0, 105.0)]);
    for crs in FRAMES {
        let slope = |n: f64| 1000.0 + 0.7 * n;
        let plain = over(&raster(crs, |_, n| slope(n)), &trail, 1000.0);
        assert!((plain.p_segment - 0.54768).abs() < INTEGRAL_TOLERANCE, "{crs:?}: {}", plain.p_segment);
        assert!(!plain.shielded && !plain.terrain_gap);
        // A ridge 80 m out as high as the source.
        let ridged = raster(crs, |_, n| slope(n) + 60.0 * (-((n + 80.0) / 8.0).powi(2)).exp());
        let behind = over(&ridged, &trail, 1000.0);
        assert!(behind.p_segment < 1e-9 && behind.shielded, "{crs:?}: {}", behind.p_segment);
        // The near side of the ridge keeps its figure.
        let near = chain(&[(-30.0, -40.0, 28.0), (30.0, -40.0, 28.0)]);
        let bare = segment_reach(&near, &fall_line(180.0), &intact(), 0.0, BLOCK_M, None).p_segment;
        assert!((over(&ridged, &near, 1000.0).p_segment - bare).abs() < INTEGRAL_TOLERANCE);
    }
}

#[test]
fn a_bench_takes_its_share() {
    // 45 deg down to 60 m, a bench to 110 m, then steep again: theta at the bench's edge is atan(60/110) = 28.61 deg,
    // P = Phi((28.61 - 34)/4) = .0889 on a circle, of which all of +-30 deg of bearing is covered.
    let profile = |d: f64| {
        if d < 60.0 {
            d
        } else if d < 110.0 {
            60.0
        } else {
            60.0 + 3.0 * (d - 110.0)
        }
    };
    let trail: Vec<SeenPoint> = (0..=800)
        .map(|k| (140.0 + 0.1 * f64::from(k)).to_radians())
        .map(|psi| SeenPoint { east_m: 150.0 * psi.sin(), north_m: 150.0 * psi.cos(), drop_m: profile(150.0) })
        .collect();
    for crs in FRAMES {
        let terrain = raster(crs, |e, n| 1000.0 - profile(e.hypot(n)));
        let benched = over(&terrain, &trail, 1000.0).p_segment;
        let expected = normal_cdf(((60f64 / 110.0).atan().to_degrees() - 34.0) / 4.0);
        // The edge is rounded by 2 m cells.
        assert!((benched - expected).abs() < 0.01, "{crs:?}: {benched} against {expected}");
        let straight = segment_reach(&trail, &fall_line(180.0), &intact(), 0.0, BLOCK_M, None).p_segment;
        assert!(straight > 0.95, "without terrain the bench is not seen: {straight}");
    }
}

#[test]
fn slope_and_bearing_are_true_on_every_grid() {
    // A plane falling 31 deg towards 200 deg true.
    let (slope, bearing) = (31f64.to_radians(), 200f64.to_radians());
    for crs in FRAMES {
        let terrain = raster(crs, |e, n| 1000.0 - slope.tan() * (e * bearing.sin() + n * bearing.cos()));
        let fall = terrain.fall(LON, LAT).unwrap();
        // Heights are held to .06 mm; over 2 m that is under a hundredth of a degree.
        assert!((fall.slope_deg - 31.0).abs() < 0.01, "{crs:?}: {fall:?}");
        assert!((fall.bearing_deg.unwrap() - 200.0).abs() < 0.02, "{crs:?}: {fall:?}");
    }
    let flat = raster(TerrainCrs::Geographic, |_, _| 12.0);
    assert_eq!(flat.fall(LON, LAT).unwrap().bearing_deg, None);
}

/// `tests/reference/geodesic.py`, GeographicLib 2.1 held against pyproj 3.7.2.
#[test]
fn distances_and_bearings_agree_with_geographiclib() {
    let text = std::fs::read_to_string("tests/reference/geodesic.csv").unwrap();
    let mut reader = csv::ReaderBuilder::new().comment(Some(b'#')).from_reader(text.as_bytes());
    let mut rows = 0;
    for row in reader.deserialize::<(f64, f64, f64, f64, f64, f64)>() {
        let (lon_a, lat_a, lon_b, lat_b, distance, azimuth) = row.unwrap();
        let at = |lon_deg, lat_deg| Position { lon_deg, lat_deg, height_m: None };
        let (a, b) = (at(lon_a, lat_a), at(lon_b, lat_b));
        // The table's coordinates are rounded to 1e-14 deg, a nanometre.
        assert!((geodesic_m(a, b) - distance).abs() < 1e-6);
        let (east, north) = east_north_m(a, b);
        // The local plane's own error: a millimetre and a thousandth of a degree within 2 km.
        assert!((east.hypot(north) - distance).abs() < 1e-3 + 1e-6 * distance, "{a:?} {distance}");
        let turn = (east.atan2(north).to_degrees() - azimuth + 180.0).rem_euclid(360.0) - 180.0;
        assert!(turn.abs() < 1e-3, "{a:?} {distance} {turn}");
        rows += 1;
    }
    assert_eq!(rows, 84);
}
