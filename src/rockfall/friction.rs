//! Friction of the contact, chance that a support goes, wide guesses where the record is silent.
//!
//! Every figure is a default of [`crate::settings::RockfallSettings`] and can be replaced there. Basis: rock on rock is
//! mixed (basic friction 26 to 38 deg, Barton & Choubey 1977, Rock Mechanics 10, 1, abstract read, plus 10 to 15 deg of
//! first-order roughness, common practice, no source); coarse and fine soil common practice, no source; burnt duff, ash, wood,
//! support and seat figures are assumptions of ours.

use crate::ensemble::distribution::Distribution;
use crate::site::{Contact, Support};

/// Friction angle by contact in the order of [`Contact::ALL`], degrees: least, most likely, greatest.
pub const FRICTION_DEG: [Distribution; 5] = [
    Distribution::triangular(37.0, 43.0, 50.0),
    Distribution::triangular(30.0, 35.0, 40.0),
    Distribution::triangular(25.0, 30.0, 35.0),
    Distribution::triangular(20.0, 27.0, 34.0),
    Distribution::triangular(17.0, 24.0, 31.0),
];

/// Chance that a support is gone within the horizon, in the order of [`Support::ALL`] (assumption). `none` holds
/// nothing to lose: its entry is 1 because the boulder is judged without a support in every draw.
pub const SUPPORT_LOSS: [f64; 5] = [1.0, 0.01, 0.1, 0.5, 0.9];

/// Weights of the contact where none is recorded, in the order of [`Contact::ALL`] (assumption).
pub const UNKNOWN_CONTACT: [f64; 5] = [0.3, 0.5, 0.2, 0.0, 0.0];

/// Weights of the support where none is recorded, in the order of [`Support::ALL`] (assumption).
pub const UNKNOWN_SUPPORT: [f64; 5] = [0.7, 0.0, 0.2, 0.1, 0.0];

/// Position of a contact in the tables.
pub fn contact_index(contact: Contact) -> usize {
    contact as usize
}

/// Position of a support in the tables.
pub fn support_index(support: Support) -> usize {
    support as usize
}

/// Which entry of a table of weights a share `u` in (0, 1) falls on.
pub fn pick(weights: &[f64; 5], u: f64) -> usize {
    let total: f64 = weights.iter().sum();
    let mut left = u * total;
    for (index, weight) in weights.iter().enumerate() {
        left -= weight;
        if left < 0.0 {
            return index;
        }
    }
    weights.iter().rposition(|w| *w > 0.0).unwrap_or(0)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn tables_follow_the_order_of_the_words() {
        assert_eq!(Contact::ALL.iter().map(|c| contact_index(*c)).collect::<Vec<_>>(), [0, 1, 2, 3, 4]);
        assert_eq!(Support::ALL.iter().map(|s| support_index(*s)).collect::<Vec<_>>(), [0, 1, 2, 3, 4]);
        assert_eq!(FRICTION_DEG[contact_index(Contact::BurntDuff)].centre, 27.0);
        assert_eq!(SUPPORT_LOSS[support_index(Support::BurntThrough)], 0.9);
    }

    #[test]
    fn shares_fall_on_their_weights() {
        let picks: Vec<usize> = [0.0, 0.299, 0.301, 0.799, 0.801, 0.999].map(|u| pick(&UNKNOWN_CONTACT, u)).into();
        assert_eq!(picks, [0, 0, 1, 1, 2, 2]);
        assert_eq!(pick(&UNKNOWN_CONTACT, 1.0), 2);
    }
}
