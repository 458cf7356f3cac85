//! Architecture of switch-mode CMOS output stages: efficiency, output power and area over the whole design space.

pub mod budget;
pub mod cli;
pub mod evaluate;
pub mod fit;
pub mod numerics;
pub mod pick;
pub mod quantity;
pub mod report;
pub mod run;
pub mod search;
pub mod sheet;
pub mod stage;
pub mod steady;
pub mod study;
pub mod technology;
