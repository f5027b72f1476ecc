//! From a spalled boulder to a rockfall source, and from a source to the ground it can reach.
//!
//! [`statics`] holds the closed-form stability of one rigid boulder, [`friction`] the tables it draws from, [`points`]
//! the static half of the ensemble, [`release`] the conditional ensemble, [`fragment`] the loose plates, [`source`] the
//! summary, [`reach`] how far and where to, [`terrain`] and [`profile`] the ground between. Equations, assumptions and
//! decisions: `docs/rockfall.md`.
//!
//! Does not simulate trajectories, storms or dead trees; a place and a likelihood within a horizon, never a time.

pub mod fragment;
pub mod friction;
pub mod place;
pub mod points;
pub mod profile;
pub mod reach;
pub mod release;
pub mod source;
pub mod statics;
pub mod terrain;

/// What one thermal draw did to a boulder, as its statics needs it.
///
/// The thermal ensemble hands over one of these per draw, in the order of its draws, so that a boulder that spalled
/// deep in a draw is the one that loses its base in that draw.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SpallDraw {
    /// Loss at the base if the base lies in the heated face, m; 0 when nothing spalled.
    pub base_retreat_m: f64,
    /// Whether a slab or a split came loose.
    pub slab_or_split: bool,
    /// Thickness of the slab or split part, m.
    pub fragment_depth_m: f64,
    /// Widest plate that the heated patch allows, m.
    pub patch_breadth_limit_m: f64,
    /// Breadth of the plate, m.
    pub slab_breadth_m: f64,
    /// The draw's fire coordinate in (0, 1), the same for every boulder of the run; larger is the hotter fire.
    pub fire_severity_u: f64,
    /// Heated share of the boulder's surface.
    pub heated_fraction: f64,
}

impl SpallDraw {
    /// A draw in which the fire did nothing to the rock.
    pub const fn unharmed(fire_severity_u: f64) -> Self {
        SpallDraw {
            base_retreat_m: 0.0,
            slab_or_split: false,
            fragment_depth_m: 0.0,
            patch_breadth_limit_m: 0.0,
            slab_breadth_m: 0.0,
            fire_severity_u,
            heated_fraction: 0.0,
        }
    }
}
