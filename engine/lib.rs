pub mod disk { pub mod conditions; }
pub mod errors;
pub mod kinetics;
pub mod network { pub mod layout; pub mod model; }
pub mod units;
