pub mod case;
pub mod disk;
pub mod errors;
pub mod kinetics { pub mod mechanism; }
pub mod network;
pub mod units;
pub mod yaml;
