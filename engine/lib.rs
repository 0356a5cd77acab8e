pub mod case;
pub mod disk;
pub mod errors;
pub mod kinetics;
pub mod network;
pub mod rates;
pub mod units;
pub mod yaml;
