//! The two faces of every station, held against each other: what the Runner does in time is what the Model says on paper.
//! A new station joins [`cases::all`] with one line.

mod cases;
mod contract;
mod in_time;
mod noise;
