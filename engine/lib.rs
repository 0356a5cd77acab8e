pub mod disk { pub mod conditions; }
pub mod errors;
pub mod kinetics;
pub mod network;
pub mod rates;
pub mod units;
pub mod yaml;
