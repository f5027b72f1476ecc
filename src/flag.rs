//! Short codes that travel with a boulder's numbers and say what they rest on. Listed in `docs/architecture.md`.

macro_rules! flags {
    ($($(#[$meta:meta])* $variant:ident = $code:literal, $meaning:literal;)+) => {
        /// A remark on one boulder's result.
        #[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
        pub enum Flag { $(#[doc = $meaning] $variant),+ }
        impl Flag {
            /// Every flag.
            pub const ALL: &'static [Flag] = &[$(Flag::$variant),+];
            /// The code in the `flags` column.
            pub fn code(self) -> &'static str { match self { $(Flag::$variant => $code),+ } }
            /// What it means, in one sentence.
            pub fn meaning(self) -> &'static str { match self { $(Flag::$variant => $meaning),+ } }
        }
    };
}

flags! {
    ExposureInferred = "exposure_inferred", "The exposure class was inferred from the residence time.";
    ExposureFromBoulder = "exposure_from_boulder", "The boulder's own residence time or exposure class was used instead of the burn's.";
    ResidenceFromClass = "residence_from_class", "No residence time was recorded; the exposure class's distribution was used.";
    RockUnknown = "rock_unknown", "The rock was not recorded; the settings' mixture of rocks was used.";
    WeatheringAssumed = "weathering_assumed", "Weathering was not recorded; fresh rock was assumed, which is the optimistic end.";
    HeatedShareAssumed = "heated_share_assumed", "The heated share of the surface was not recorded; the class's distribution was used.";
    MoistureAssumed = "moisture_assumed", "Moisture was not recorded; dry rock was assumed.";
    SizeAssumed = "size_assumed", "An outcrop without a size: the heated patch was assumed.";
    ConductionSphere = "conduction_sphere", "The heated depth is not small beside the radius in at least one draw; those draws conduct in a sphere.";
    ResidualStage = "residual_stage", "The residence exceeds the flaming cap of its class; the excess was run as residual burning.";
    LogStage = "log_stage", "A log against the rock was run as a second stage on a patch.";
    StandoffUsed = "standoff_used", "The boulder stands off the flames; only radiation across the gap was used.";
    BeyondFlames = "beyond_flames", "The boulder is more than ten flame lengths from the flames; no exposure was computed to reach it.";
    EnergyCapped = "energy_capped", "In at least one draw the fire ended early, when the absorbed heat reached its share of the fuel's heat.";
    SeveralFires = "several_fires", "Several dated burns cover the boulder; each was run from ambient and the results were combined.";
    OverlappingBurns = "overlapping_burns", "Several undated burns cover the boulder; the longest residence was used.";
    OnBurnEdge = "on_burn_edge", "The boulder lies on the edge of its burn polygon.";
    NumberAsText = "number_as_text", "A number was written as text and read as a number.";
    ValueSuspicious = "value_suspicious", "A value is allowed but unusual; see the run record.";
    ConvexFactorOutside = "convex_factor_outside", "The heated cap or the hot skin lies outside the range in which the convex-face factor was checked.";
    VapourConsidered = "vapour_considered", "The rock was wet; pore pressure was added where the rock is tight enough to hold it.";
    SourcePartial = "source_partial", "The standing of the boulder is only partly recorded; what is missing was sampled wide.";
    CheckMeasurements = "check_measurements", "The recorded geometry contradicts a standing boulder; no source likelihood was computed.";
    SlopeFromTerrain = "slope_from_terrain", "Slope was taken from the elevation raster.";
    BearingFromTerrain = "bearing_from_terrain", "Downslope bearing was taken from the elevation raster.";
    HeightFromTerrain = "height_from_terrain", "Height was taken from the elevation raster.";
    BearingUnknown = "bearing_unknown", "Downslope bearing unknown; travel directions were taken as even over 90 degrees about the nearest point of each trail segment.";
    NoTerrain = "no_terrain", "Reach was judged along straight rays; ridges and valleys between were not checked.";
    HeightUnusual = "height_unusual", "The recorded height looks wrong (zero, feet, or far from its neighbours or the raster).";
    BurntThroughSupport = "burnt_through_support", "The support is burnt through.";
    SourceNotRecorded = "source_not_recorded", "Slope or size is not recorded; no source likelihood, only a place in the inspection order.";
    ShakingConsidered = "shaking_considered", "The settings ask for shaking; the pseudo-static coefficient overstates overturning by short shaking.";
    TerrainGap = "terrain_gap", "The elevation raster has gaps or ends along the way; those stretches were not checked for ridges and valleys.";
    BaseScarMeasured = "base_scar_measured", "A scar measured at the base replaced the computed loss.";
}

/// The `flags` cell: codes in their fixed order, separated by semicolons.
pub fn codes(flags: &std::collections::BTreeSet<Flag>) -> String {
    flags.iter().map(|f| f.code()).collect::<Vec<_>>().join(";")
}
