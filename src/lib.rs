//! Architecture of switch-mode CMOS output stages: efficiency, output power and area over the whole design space.

pub mod numerics;
pub mod study;
pub mod technology;
