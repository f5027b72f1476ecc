//! What one draw did.

/// A way to spall.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Family {
    /// Thin plate from surface compression.
    Flake,
    /// Thick plate from tension normal to the surface.
    Slab,
    /// The boulder parts.
    Split,
    /// A recorded rind or loose sheet lets go.
    Rind,
}

impl Family {
    /// The word in files.
    pub fn word(self) -> &'static str {
        match self {
            Family::Flake => "flake",
            Family::Slab => "slab",
            Family::Split => "split",
            Family::Rind => "rind",
        }
    }
}

/// One event of a draw.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Event {
    /// How it spalled.
    pub family: Family,
    /// When, s from the start of the fire.
    pub time_s: f64,
    /// Thickness of what came off, m; half the radius for a split.
    pub depth_m: f64,
    /// Face temperature at that moment, K.
    pub surface_k: f64,
}

/// Slabs that may follow one another, at most; more are not kept.
pub const SLABS_MAX: usize = 6;
const EVENTS_MAX: usize = SLABS_MAX + 3;

/// Events in the order in which they were found, which is the order of time but for ties within a step.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Events {
    list: [Option<Event>; EVENTS_MAX],
    count: usize,
}

impl Events {
    /// Adds one.
    ///
    /// # Panics
    /// Beyond one flake, one split, one rind and [`SLABS_MAX`] slabs, which the watch rules out.
    pub fn push(&mut self, event: Event) {
        self.list[self.count] = Some(event);
        self.count += 1;
    }

    /// All of them.
    pub fn iter(&self) -> impl Iterator<Item = Event> + '_ {
        self.list[..self.count].iter().flatten().copied()
    }

    /// Those of one family.
    pub fn of(&self, family: Family) -> impl Iterator<Item = Event> + '_ {
        self.iter().filter(move |e| e.family == family)
    }

    /// Whether none happened.
    pub fn is_empty(&self) -> bool {
        self.count == 0
    }
}

/// What one draw did in one fire.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Outcome {
    /// Hottest face temperature, K.
    pub peak_surface_k: f64,
    /// Largest net flux into the face, W/m2.
    pub peak_flux_w_m2: f64,
    /// Largest heat absorbed so far, J/m2.
    pub absorbed_j_m2: f64,
    /// Largest skin stress at any depth, Pa.
    pub peak_stress_pa: f64,
    /// Largest normal tension before any slab left, Pa.
    pub peak_tension_pa: f64,
    /// Cold strength that it was held against, Pa.
    pub strength_pa: f64,
    /// Hot skin thickness N/s(0) at the first slab, over the radius; 0 without one.
    pub skin_over_radius: f64,
    /// Share of the flakable sites that let go, 0 to 1.
    pub flaked_sites: f64,
    /// The fire ended early on its fuel.
    pub fuel_spent: bool,
    /// Events.
    pub events: Events,
}

/// Nothing spalls below this absorbed peak, W/m2, or this dose, J/m2 (physics page, 4.5).
pub const FLUX_FLOOR_W_M2: f64 = 10e3;
/// See [`FLUX_FLOOR_W_M2`].
pub const DOSE_FLOOR_J_M2: f64 = 1e6;

impl Outcome {
    /// Whether the exposure was strong enough for any spall to count.
    pub fn above_floor(&self) -> bool {
        self.peak_flux_w_m2 >= FLUX_FLOOR_W_M2 && self.absorbed_j_m2 >= DOSE_FLOOR_J_M2
    }
}
