//! Temperature through time over the draws: the 5, 50 and 95 % quantiles at fixed depths and moments.
//!
//! T_q(z, t) is the q quantile over the draws j of T_j(z, t), each draw marched as in a run (same samples, grid and steps).
//! z is the depth below the face of that moment, m: where a plate leaves, the rock below it is the face. Between two steps
//! T is linear in time. Quantiles are taken moment by moment: a band is no history of any one draw, and its upper edge lies
//! below the 95 % quantile of the peaks wherever the draws peak at different times.
//!
//! Where a draw's own history ends before a moment, or its sphere before a depth, it has no value there, and where one
//! draw has none there is no quantile. The column of a half-space ends where nothing is felt; below it the rock has the
//! temperature of its last node. Stress and tension have no bands here.

use super::batch::{self, Constant, WatchInputs};
use super::draws::{Body, Draw};
use super::fires::Fire;
use super::{Model, Quantiles};
use crate::heat::column::Column;
use crate::heat::march::{Moment, Observer, Verdict};
use crate::numerics::lanes::{LANES, Lanes};
use crate::numerics::quantile::{quantile_sorted, sorted};
use crate::site::Boulder;
use crate::spall::watch::Watch;

/// Bands of temperature; outer index of the table is depth, inner is time.
#[derive(Debug, Clone, PartialEq)]
pub struct TemperatureBands {
    /// Depths below the face, m.
    pub depth_m: Vec<f64>,
    /// Moments since the fire reached the rock, s.
    pub time_s: Vec<f64>,
    /// Quantiles, K; `None` where a draw has no value.
    pub temperature_k: Vec<Vec<Option<Quantiles>>>,
    /// How many draws.
    pub draws: usize,
}

/// Temperatures of every draw, K, `[depth][time][draw]`; `None` past the end of its history or column.
type Histories = Vec<Vec<Vec<Option<f64>>>>;

impl Model {
    /// Bands of one boulder in one fire. Both lists ascend from 0 or above.
    pub fn temperature_bands(
        &self,
        boulder: &Boulder,
        fire: &Fire,
        depth_m: &[f64],
        time_s: &[f64],
    ) -> TemperatureBands {
        let band = |values: &Vec<Option<f64>>| {
            let values: Option<Vec<f64>> = values.iter().copied().collect();
            let values = sorted(values?);
            let q = |p: f64| quantile_sorted(&values, p);
            (!values.is_empty()).then(|| Quantiles { p05: q(0.05), p50: q(0.5), p95: q(0.95) })
        };
        let histories = self.histories(boulder, fire, depth_m, time_s);
        TemperatureBands {
            depth_m: depth_m.to_vec(),
            time_s: time_s.to_vec(),
            temperature_k: histories.iter().map(|times| times.iter().map(band).collect()).collect(),
            draws: self.points.draws(),
        }
    }

    fn histories(&self, boulder: &Boulder, fire: &Fire, depth_m: &[f64], time_s: &[f64]) -> Histories {
        let body = Body::of(boulder);
        let rocks = self.rocks_of(&boulder.rock);
        let mut histories = vec![vec![vec![None; self.points.draws()]; time_s.len()]; depth_m.len()];
        self.each_group(boulder, &body, fire, &rocks, |rock, draws, numbers| {
            let seen = self.march_seen(draws, &body, rock, depth_m, time_s);
            for (l, j) in numbers.iter().enumerate() {
                for (k, row) in seen[l].iter().enumerate() {
                    for (i, value) in row.iter().enumerate() {
                        histories[i][k][*j] = *value;
                    }
                }
            }
        });
        histories
    }

    /// Eight draws as in [`batch::run`], seen at the moments: `[lane][time][depth]`, shorter where a history ends early.
    fn march_seen(
        &self,
        lanes: &[Draw; LANES],
        body: &Body,
        rock: usize,
        depth_m: &[f64],
        time_s: &[f64],
    ) -> [Vec<Vec<Option<f64>>>; LANES] {
        let (table, settings, resolution) = (&self.tables.rocks[rock], &self.settings.spall, &self.resolution);
        let all = |f: fn(&Draw) -> f64| Lanes::from_fn(|l| f(&lanes[l]));
        let material = batch::material(lanes, body, table, &table.curve, Constant::default());
        let pulse = batch::pulse(lanes, settings);
        let inputs = WatchInputs::new(lanes, body, table, &table.skin, &table.strength, settings);
        let whole_s = pulse.residence_s + pulse.decay_s * batch::DECAY_LENGTHS;
        let grid = batch::grid(lanes, body, pulse.residence_s, whole_s, resolution);
        let start_k = all(|d| d.ambient_k);
        let mut moments = Moments {
            watch: inputs.watch(&material, &grid),
            depth_m,
            time_s,
            before_s: Lanes::ZERO,
            before: std::array::from_fn(|l| vec![Some(start_k.0[l]); depth_m.len()]),
            seen: std::array::from_fn(|_| Vec::with_capacity(time_s.len())),
        };
        let limit = all(|d| d.absorbed_limit_j_m2);
        batch::march(&material, &pulse, grid, start_k, limit, resolution, &mut moments);
        moments.seen
    }
}

/// Keeps temperatures at the wanted moments, linear between steps.
struct Moments<'a> {
    watch: Watch<'a>,
    depth_m: &'a [f64],
    time_s: &'a [f64],
    before_s: Lanes,
    before: [Vec<Option<f64>>; LANES],
    seen: [Vec<Vec<Option<f64>>>; LANES],
}

impl Observer for Moments<'_> {
    fn see(&mut self, column: &mut Column, moment: &Moment) -> Verdict {
        // The watch comes first: where a plate leaves, it takes it off the column.
        self.watch.see(column, moment);
        for lane in 0..LANES {
            let now: Vec<Option<f64>> = self.depth_m.iter().map(|z| at_depth(column, lane, *z)).collect();
            let (from_s, to_s) = (self.before_s.0[lane], moment.time_s.0[lane]);
            while let Some(wanted_s) = self.time_s.get(self.seen[lane].len()).filter(|t| **t <= to_s) {
                let share = if to_s > from_s { ((wanted_s - from_s) / (to_s - from_s)).max(0.0) } else { 1.0 };
                let between =
                    |(a, b): (&Option<f64>, &Option<f64>)| Some(a.as_ref()? + share * (b.as_ref()? - a.as_ref()?));
                let row = self.before[lane].iter().zip(&now).map(between).collect();
                self.seen[lane].push(row);
            }
            self.before[lane] = now;
        }
        self.before_s = moment.time_s;
        match self.seen.iter().all(|rows| rows.len() == self.time_s.len()) {
            true => Verdict::Enough,
            false => Verdict::Continue,
        }
    }

    fn finish(&mut self, moment: &Moment) {
        self.watch.finish(moment);
    }
}

/// Temperature of one lane at a depth, K; `None` beyond the centre of a sphere.
fn at_depth(column: &Column, lane: usize, depth_m: f64) -> Option<f64> {
    let depth = &column.grid.depth_m;
    let value = |i: usize| column.temperature_k[i].0[lane];
    let Some(after) = depth.iter().position(|z| z.0[lane] >= depth_m) else {
        let sphere = column.grid.curvature_per_m.0[lane] > 0.0;
        return (!sphere).then(|| value(depth.len() - 1));
    };
    if after == 0 {
        return Some(value(0));
    }
    let (z0, z1) = (depth[after - 1].0[lane], depth[after].0[lane]);
    Some(value(after - 1) + (depth_m - z0) / (z1 - z0) * (value(after) - value(after - 1)))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::assess::fires::fires_at;
    use crate::fire::exposure::ExposureClass;
    use crate::rock::catalogue::Catalogue;
    use crate::settings::Settings;
    use crate::site::{HeatingRecord, Kind, Position, RockChoice, StandingRecord};

    /// Steps of a run are up to a tenth of the rise; a peak between two moments is missed by less.
    const PEAK_MISSED_K: f64 = 3.0;

    fn boulder() -> Boulder {
        let exposure = Some(ExposureClass::Crown);
        Boulder {
            id: "B".to_owned(),
            position: Position { lon_deg: 0.0, lat_deg: 0.0, height_m: None },
            rock: RockChoice::Named("granite".to_owned()),
            kind: Kind::Boulder,
            radius_m: Some(0.75),
            axes_m: None,
            heating: HeatingRecord { exposure, ..HeatingRecord::default() },
            standing: StandingRecord::default(),
        }
    }

    fn model() -> Model {
        let settings = Settings { draws: 32, ..Settings::default() };
        Model::new(settings, Catalogue::embedded()).expect("the mixture is in the catalogue")
    }

    #[test]
    fn every_draw_peaks_where_the_run_says_it_does() {
        // The run keeps each draw's hottest face; the histories must reach it and nothing above it.
        let (model, boulder) = (model(), boulder());
        let fires = fires_at(&boulder, &[], &mut Default::default()).expect("a fire");
        let times: Vec<f64> = (0..3000).map(|i| f64::from(i) * 0.2).collect();
        let histories = model.histories(&boulder, &fires[0], &[0.0], &times);
        let (_, summaries) = model.assess_with_draws(&boulder, &[]);
        assert_eq!(summaries.len(), 32);
        let mut reached = 0;
        for (j, summary) in summaries.iter().enumerate() {
            let face: Vec<f64> = histories[0].iter().map_while(|row| row[j]).collect();
            let hottest = face.iter().copied().fold(0.0, f64::max);
            assert!(hottest <= summary.peak_surface_k * (1.0 + 1e-12), "draw {j}: {hottest} K");
            reached += usize::from(summary.peak_surface_k - hottest < PEAK_MISSED_K);
        }
        // A draw whose fire outlasts the moments asked for, or whose plate leaves at the peak, may stay below.
        assert!(reached >= 24, "{reached} of 32 draws reach their peak");
    }

    #[test]
    fn bands_start_cold_fade_with_depth_and_end_where_a_history_does() {
        let (model, boulder) = (model(), boulder());
        let fires = fires_at(&boulder, &[], &mut Default::default()).expect("a fire");
        let bands = model.temperature_bands(&boulder, &fires[0], &[0.0, 0.02, 0.1], &[0.0, 60.0, 300.0, 1e9]);
        let at = |depth: usize, time: usize| bands.temperature_k[depth][time];
        for depth in 0..3 {
            let start = at(depth, 0).expect("the start");
            // Ambient is drawn evenly from 25 to 50 C.
            assert!((298.15..=323.15).contains(&start.p05) && (298.15..=323.15).contains(&start.p95), "{start:?}");
            assert_eq!(at(depth, 3), None, "no history lasts for decades");
        }
        let minute: Vec<Quantiles> = (0..3).map(|depth| at(depth, 1).expect("within every history")).collect();
        assert!(minute.windows(2).all(|w| w[0].p95 > w[1].p95 && w[0].p50 > w[1].p50), "{minute:?}");
        assert!(minute[0].p05 < minute[0].p50 && minute[0].p50 < minute[0].p95);
        // 10 cm lie beyond the diffusion length of a minute (about 9 mm): cold still.
        assert!((minute[2].p50 - at(2, 0).expect("the start").p50).abs() < 0.5);
    }
}
