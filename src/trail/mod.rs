//! From sources to stretches of trail: segments, who reaches them, what that means for people, what is proposed.
//!
//! [`segments`] cuts trails, [`exposure`] pairs sources with segments, [`combine`] joins likelihoods, [`passage`] turns
//! them into figures for people, [`proposal`] into a word with its reason, [`judge`] does all of it for one segment,
//! [`inspection`] orders the boulders.

pub mod combine;
pub mod exposure;
pub mod inspection;
pub mod judge;
pub mod passage;
pub mod proposal;
pub mod segments;
pub mod survey;
