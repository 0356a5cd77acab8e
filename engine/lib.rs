pub mod disk { pub mod conditions; }
pub mod errors;
pub mod kinetics { pub mod mechanism; }
pub mod network { pub mod layout; pub mod model; }
pub mod run;
pub mod store;
pub mod units;
