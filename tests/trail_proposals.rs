//! Segments, joint likelihoods, figures for people, proposals and inspection order.

use spallcast::rockfall::SpallDraw;
use spallcast::rockfall::place::place;
use spallcast::rockfall::points::StaticPoints;
use spallcast::rockfall::reach::ReachAngle;
use spallcast::rockfall::release::{StaticsInputs, assess_source};
use spallcast::rockfall::source::{STRATA, SourceSummary, TriggerStrata};
use spallcast::settings::{Settings, TrailSettings};
use spallcast::site::{Boulder, Contact, HeatingRecord, Kind, Position, RockChoice, StandingRecord, Support, Trail};
use spallcast::trail::combine::{Share, combine};
use spallcast::trail::exposure::{ReachSource, SegmentIndex, exposures};
use spallcast::trail::inspection::{InspectionKey, ranks};
use spallcast::trail::judge::{Judged, SegmentResult, judge};
use spallcast::trail::proposal::{Evidence, Named, Proposal, choose};
use spallcast::trail::segments::{POINT_SPACING_M, cut, geodesic_m};

const LON: f64 = -119.5;
const LAT: f64 = 37.7;
const WET: f64 = 0.9;

fn at(east_m: f64, north_m: f64, height_m: f64) -> Position {
    // Metres per degree at 37.7 N from the series in `rockfall::terrain`.
    let (north, east) = spallcast::rockfall::terrain::metres_per_degree(LAT);
    Position { lon_deg: LON + east_m / east, lat_deg: LAT + north_m / north, height_m: Some(height_m) }
}

fn trail(lines: Vec<Vec<Position>>) -> Trail {
    Trail {
        id: "T1".to_owned(),
        name: Some("Invented trail".to_owned()),
        lines,
        passages_per_day: Some(80.0),
        walking_speed_m_s: None,
        standing_s: None,
    }
}

#[test]
fn segments_run_on_and_keep_heights() {
    let t = trail(vec![
        vec![at(0.0, 0.0, 100.0), at(130.0, 0.0, 113.0), at(130.0, 62.0, 113.0)],
        vec![at(200.0, 0.0, 50.0), at(230.0, 0.0, 50.0)],
    ]);
    let segments = cut(&t, 3, 50.0);
    let marks: Vec<(f64, f64)> = segments.iter().map(|s| (s.from_m.round(), s.to_m.round())).collect();
    assert_eq!(marks, [(0.0, 50.0), (50.0, 100.0), (100.0, 150.0), (150.0, 192.0), (192.0, 222.0)]);
    assert_eq!(segments.iter().map(|s| s.number).collect::<Vec<_>>(), [1, 2, 3, 4, 5]);
    for s in &segments {
        let length: f64 = s.points.windows(2).map(|w| geodesic_m(w[0], w[1])).sum();
        assert!((length - s.length_m()).abs() < 1e-3, "{length} {}", s.length_m());
        assert!(s.points.windows(2).all(|w| geodesic_m(w[0], w[1]) <= POINT_SPACING_M + 1e-6));
        assert_eq!(s.trail, 3);
    }
    assert_eq!(segments[0].points.last(), segments[1].points.first());
    // 50 m of 130 m of a climb of 13 m.
    assert!((segments[0].points.last().unwrap().height_m.unwrap() - 105.0).abs() < 1e-3);
    // Exact multiples leave no sliver; a short trail is one segment.
    assert_eq!(cut(&trail(vec![vec![at(0.0, 0.0, 0.0), at(100.0, 0.0, 0.0)]]), 0, 50.0).len(), 2);
    assert_eq!(cut(&trail(vec![vec![at(0.0, 0.0, 0.0), at(7.0, 0.0, 0.0)]]), 0, 50.0).len(), 1);
}

fn share(p: f64) -> Share {
    Share { p_source: p, p_source_low: p, p_source_high: p, strata: TriggerStrata { p: [p; STRATA] }, p_segment: 1.0 }
}

#[test]
fn joint_likelihoods() {
    // Hand: 1 - .9 x .95 x .98 = .1621.
    let c = combine(&[share(0.1), share(0.05), share(0.02)], WET);
    assert!((c.p_any_independent - 0.1621).abs() < 1e-12);
    assert!((c.p_any - 0.1621).abs() < 1e-12, "without a shared trigger both agree");
    assert_eq!((c.p_any_low, c.p_any_high), (0.1, 0.1 + 0.05 + 0.02));
    // Two sources that fall only in a wet spell: together p, not 1 - (1 - p)^2.
    let mut wet_only = share(0.45);
    wet_only.strata.p = std::array::from_fn(|s| if s % 2 == 1 { 0.5 } else { 0.0 });
    let c = combine(&[wet_only, wet_only], WET);
    // .9 x (1 - .5 x .5) against 1 - .55 x .55.
    assert!((c.p_any - 0.675).abs() < 1e-12 && (c.p_any_independent - 0.6975).abs() < 1e-12);
    assert_eq!(combine(&[], WET).p_any_high, 0.0);
}

fn evidence(per_passage_p95: f64) -> Evidence {
    Evidence { per_passage_p95, listed_near: true, ..Evidence::default() }
}

#[test]
fn limits_and_their_order() {
    let limits = TrailSettings::default();
    let rows = [
        (1e-5, Proposal::KeepClosed),
        (9.9e-6, Proposal::LookFirst),
        (1e-6, Proposal::LookFirst),
        (9.9e-7, Proposal::Warn),
        (1e-7, Proposal::Warn),
        (9.9e-8, Proposal::NoLimit),
        (0.0, Proposal::NoLimit),
    ];
    for (p, word) in rows {
        assert_eq!(choose(&evidence(p), &limits), word, "{p}");
    }
    let named = || vec![Named { id: "X".to_owned(), why: "no slope".to_owned(), p_segment: Some(0.2) }];
    // What is not known never looks open, and never hides a closing word.
    for (p, word) in [(0.0, Proposal::NotAssessed), (5e-7, Proposal::NotAssessed), (2e-6, Proposal::LookFirst)] {
        assert_eq!(choose(&Evidence { unassessed: named(), ..evidence(p) }, &limits), word);
    }
    assert_eq!(choose(&Evidence { listed_near: false, ..evidence(0.0) }, &limits), Proposal::NotAssessed);
    assert_eq!(choose(&Evidence { burnt_through: named(), ..evidence(0.0) }, &limits), Proposal::LookFirst);
    // Stops alone ask for a warning, no more: without stopping the passage's figure governs.
    assert_eq!(choose(&Evidence { per_stop_p95: Some(1e-4), ..evidence(0.0) }, &limits), Proposal::Warn);
    assert_eq!(
        Proposal::ALL.iter().map(|p| p.word()).collect::<Vec<_>>(),
        ["no limit from this screening", "open with warning", "not assessed", "closed until looked at", "keep closed"]
    );
}

fn boulder(id: &str, support: Support) -> Boulder {
    Boulder {
        id: id.to_owned(),
        position: at(0.0, 0.0, 1000.0),
        rock: RockChoice::Named("granite".to_owned()),
        kind: Kind::Boulder,
        radius_m: Some(0.75),
        axes_m: None,
        heating: HeatingRecord::default(),
        standing: StandingRecord {
            slope_deg: Some(33.0),
            downslope_azimuth_deg: Some(180.0),
            contact: Some(Contact::BurntDuff),
            seat_depth_m: Some(0.15),
            centroid_setback_m: Some(0.5),
            centroid_height_m: Some(0.6),
            support: Some(support),
            ..StandingRecord::default()
        },
    }
}

fn source(boulder: &Boulder, settings: &Settings) -> SourceSummary {
    let draws: Vec<SpallDraw> = (0..512).map(|d| SpallDraw::unharmed((f64::from(d) + 0.5) / 512.0)).collect();
    let points = StaticPoints::new(512, 1, &settings.rockfall);
    assess_source(&StaticsInputs::of(boulder, None), &draws, &points, &settings.rockfall, settings.horizon_days)
}

/// Judges the only segment of a trail under one boulder.
fn run(boulder: &Boulder, assessed: bool, line: Vec<Position>, settings: &Settings) -> SegmentResult {
    let t = trail(vec![line]);
    let segments = cut(&t, 0, 1000.0);
    let index = SegmentIndex::new(&segments);
    let placed = place(boulder, None, &settings.rockfall);
    let angle = ReachAngle::new(&settings.rockfall, None);
    let reach_source = ReachSource { position: boulder.position, placed: &placed, width_m: 1.5, angle: &angle };
    let found = exposures(&reach_source, &index, None, &settings.rockfall, settings.trail.looked_at_m);
    let summary = source(boulder, settings);
    let judged = Judged {
        boulder,
        placed: &placed,
        source: assessed.then_some(&summary),
        not_assessed: (!assessed).then_some("diameter_m is -1, expected 0.05 to 60"),
    };
    let exposed: Vec<_> = found.into_iter().map(|e| (judged, e)).collect();
    judge(&segments[0], &t, &exposed, false, settings, jiff::civil::date(2030, 5, 1))
}

fn below() -> Vec<Position> {
    vec![at(-60.0, -150.0, 895.0), at(60.0, -150.0, 895.0)]
}

fn check_words(result: &SegmentResult) {
    for text in [&result.decision.reason, &result.decision.reopens_when] {
        let lower = text.to_lowercase();
        assert!(!lower.contains("safe") && !lower.contains(" must ") && !lower.contains("nan"), "{text}");
        assert!(text.ends_with('.') && !text.contains("..") && !text.contains("  "), "{text}");
    }
}

#[test]
fn one_boulder_end_to_end() {
    let settings = Settings::default();
    let b = boulder("A-1", Support::Charred);
    let result = run(&b, true, below(), &settings);
    let summary = source(&b, &settings);
    let combined = result.combined.unwrap();
    // One boulder: P_any is its own p_source x P_seg (.54768 by SciPy), shared triggers or not.
    let p = summary.p_source.unwrap() * 0.54768;
    assert!((combined.p_any - p).abs() < 1e-4 && (combined.p_any_independent - p).abs() < 1e-4);
    // .5 x p(high) x 2 m / (1 m/s x 180 d).
    let death = 0.5 * summary.p_source_high.unwrap() * 0.54768 * 2.0 / (180.0 * 86_400.0);
    assert!((result.people.unwrap().per_passage_p95 / death - 1.0).abs() < 1e-4);
    assert!((result.people.unwrap().season.unwrap() / (0.5 * p * 2.0 / 86_400.0 * 80.0) - 1.0).abs() < 1e-4);
    assert_eq!(result.boulder_ids, ["A-1"]);
    assert_eq!(result.review_on, jiff::civil::date(2030, 5, 31));
    assert!(result.decision.reason.contains("ridges and valleys between were not checked"));
    assert!(result.decision.reason.contains("A-1") && result.decision.reason.contains("metres 0 to 120"));
    check_words(&result);
    // Shorter horizons and lower limits climb through the words.
    for (factor, word) in
        [(0.9, Proposal::KeepClosed), (9.0, Proposal::LookFirst), (90.0, Proposal::Warn), (900.0, Proposal::NoLimit)]
    {
        let mut s = settings.clone();
        s.trail.keep_closed_at = death * factor;
        s.trail.look_first_at = death * factor / 10.0;
        s.trail.warn_at = death * factor / 100.0;
        let result = run(&b, true, below(), &s);
        assert_eq!(result.decision.proposal, word);
        check_words(&result);
    }
}

#[test]
fn burnt_through_is_looked_at_first() {
    let result = run(&boulder("A-2", Support::BurntThrough), true, below(), &Settings::default());
    assert_eq!(result.decision.proposal, Proposal::LookFirst);
    assert!(result.decision.reason.contains("burnt through"));
    check_words(&result);
    // Also when the boulder has no likelihood.
    let unassessed = run(&boulder("A-2", Support::BurntThrough), false, below(), &Settings::default());
    assert_eq!(unassessed.decision.proposal, Proposal::LookFirst);
    // Out of reach it closes nothing.
    let far = vec![at(-20.0, -260.0, 980.0), at(20.0, -260.0, 980.0)];
    assert_eq!(
        run(&boulder("A-2", Support::BurntThrough), true, far, &Settings::default()).decision.proposal,
        Proposal::NoLimit
    );
}

#[test]
fn what_nobody_knows_never_looks_open() {
    let settings = Settings::default();
    let no_number = run(&boulder("B-1", Support::None), false, below(), &settings);
    assert_eq!(no_number.decision.proposal, Proposal::NotAssessed);
    assert_eq!((no_number.combined, no_number.people), (None, None));
    assert_eq!(no_number.boulder_ids, ["B-1"]);
    assert!(no_number.decision.reason.contains("diameter_m is -1"), "{}", no_number.decision.reason);
    check_words(&no_number);
    // A slope is missing: assessed for spalling, no source likelihood.
    let mut bare = boulder("B-2", Support::None);
    bare.standing = StandingRecord { downslope_azimuth_deg: Some(180.0), ..StandingRecord::default() };
    assert_eq!(run(&bare, true, below(), &settings).decision.proposal, Proposal::NotAssessed);
    // No height of the boulder, none of the trail.
    let mut floating = boulder("B-3", Support::Charred);
    floating.position.height_m = None;
    let result = run(&floating, true, below(), &settings);
    assert_eq!(result.decision.proposal, Proposal::NotAssessed);
    check_words(&result);
    let flat = below().into_iter().map(|p| Position { height_m: None, ..p }).collect();
    assert_eq!(run(&boulder("B-4", Support::Charred), true, flat, &settings).decision.proposal, Proposal::NotAssessed);
    // Far from everything listed.
    let away = vec![at(5000.0, 0.0, 900.0), at(5040.0, 0.0, 900.0)];
    let result = run(&boulder("B-5", Support::Charred), true, away, &settings);
    assert_eq!((result.decision.proposal, result.combined), (Proposal::NotAssessed, None));
    check_words(&result);
}

#[test]
fn unknown_bearings_count_towards_every_segment() {
    let settings = Settings::default();
    let mut b = boulder("C-1", Support::Charred);
    b.standing.downslope_azimuth_deg = None;
    for side in [1.0, -1.0] {
        let line = vec![at(side * 150.0, -60.0, 895.0), at(side * 150.0, 60.0, 895.0)];
        let result = run(&b, true, line, &settings);
        assert!(result.combined.unwrap().p_any > 0.1);
        assert!(result.decision.reason.contains("quarter circle"));
    }
}

#[test]
fn inspection_order() {
    let key = |id: &str, upper, width, day: Option<i8>| InspectionKey {
        id: id.to_owned(),
        upper_exposure: upper,
        interval_width: width,
        observed_on: day.map(|d| jiff::civil::date(2030, 4, d)),
    };
    let keys = [
        key("out of reach", 0.0, 0.1, Some(1)),
        key("wide", 0.5, 0.9, Some(9)),
        key("narrow, seen late", 0.5, 0.2, Some(9)),
        key("narrow, seen early", 0.5, 0.2, Some(2)),
        key("narrow, never seen", 0.5, 0.2, None),
        key("unknown, within reach", 1.0, 1.0, None),
        key("unknown, out of reach", 0.0, 1.0, None),
    ];
    assert_eq!(ranks(&keys), [7, 2, 5, 4, 3, 1, 6]);
}
