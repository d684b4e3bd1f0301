//! Questions about designs, answered from figures: whether the limits are met.

pub mod requirements;
