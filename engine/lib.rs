//! frostclock computes how the gas and the ice of a planet-forming disk change with time: cell by
//! cell, from a network of reactions, the conditions of the cells and a start composition.
//!
//! Data flows one way, and every folder of the engine is one stage of it:
//!
//! 1. [`case`] reads a case file, checks everything in it and fills in the defaults. Its helpers
//!    are [`yaml`], which keeps the line of every entry, and [`units`].
//! 2. [`disk`] makes the cells and their conditions from a table or a recipe.
//! 3. [`network`] reads the reaction network, checks it and expands it: from each ice line follow
//!    freeze-out and the ways back, from each ion its neutralisation on grains of every charge.
//! 4. [`rates`] turns a reaction and a cell into a coefficient, one file per cause, and the
//!    network into the abstract steps of the kinetics.
//! 5. [`kinetics`] integrates dx/dt of one cell. It knows no chemistry.
//! 6. [`run`] does this for all cells on all processors, keeps every finished cell in a journal,
//!    and goes on from there after an interruption.
//! 7. [`store`] makes the run file, HDF5 that explains itself, and reads it back.
//! 8. [`answers`] reads results off a run file.
//!
//! Beside this way, [`inquiry`] computes what somebody asks for apart from a run: coefficients of a
//! network in given conditions.
//!
//! [`command`] is the program `frostclock`, a thin layer over these; [`errors`] holds the one
//! failure type and its exit statuses. Once [`run::Prepared`] exists, nothing a user wrote can
//! still be wrong.
//!
//! # The whole way in one example
//!
//! Carbon monoxide freezes out in one cold cell.
//!
//! ```
//! use frostclock::run::{self, Prepared, signals::StopFlag};
//! use frostclock::{answers, case, store};
//!
//! let network = "
//! network: freeze
//! layout: 1
//! sources: {me: own example}
//! species:
//!   - {name: CO}
//! ices:
//!   - {species: CO, energy: 1390, prefactor: 9.14e+14, photodesorption: [], standing: recalled, source: me}
//! ";
//! let cells = "radius [au],height [au],n_H [cm^-3],T_gas [K],zeta_cosmic [s^-1]
//! 100, 0, 1.0e8, 15, 1.3e-17
//! ";
//! let text = "
//! title: one cold place
//! network: freeze.yaml
//! disk: {table: cells.csv, fields: []}
//! start: {abundances: {CO: 1.0e-4}}
//! clock: {at: [50 yr, 1 kyr]}
//! ";
//!
//! // 1-2: the case with its files; from the disk `case::open(path)` does the same.
//! let files: case::Files = &|path| match path.to_str() {
//!     Some("freeze.yaml") => Ok(network.to_string()),
//!     Some("cells.csv") => Ok(cells.to_string()),
//!     _ => Err(std::io::ErrorKind::NotFound.into()),
//! };
//! let case = case::read("cold.yaml".as_ref(), text, files)?;
//!
//! // 3-4: the network read and expanded, one start state per cell.
//! let prepared = Prepared::new(&case)?;
//! let changes: Vec<&str> =
//!     prepared.chemistry.reactions.iter().map(|r| r.change.as_str()).collect();
//! assert_eq!(changes, ["CO -> CO(ads)", "CO(ads) -> CO", "CO(ads) -> CO"]);
//!
//! // 5-7: all cells, journal and run file. The same call after an interruption goes on.
//! let folder = tempfile::tempdir()?;
//! let output = folder.path().join("cold.h5");
//! let options = run::Options { threads: 1, fresh: false, retry: false };
//! let summary =
//!     run::run(&prepared, &output, &options, &Default::default(), &StopFlag::new())?;
//! assert_eq!((summary.cells, summary.failed), (1, 0));
//!
//! // 8: what became of it. A molecule of CO meets a grain once in 51 yr here; in the end only what
//! // cosmic rays knock off the ice is gas.
//! let results = store::open(&output)?;
//! let species = answers::select::species(results.header(), "CO,CO(ads)")?;
//! let gas = results.history(0, species[0])?;
//! let ice = results.history(0, species[1])?;
//! assert_eq!(results.header().times_yr.len(), gas.len());
//! assert!(gas[0] == 1.0e-4 && (3.0e-5..4.0e-5).contains(&gas[1]) && gas[2] < 1.0e-8);
//! assert!((gas[1] + ice[1] - 1.0e-4).abs() < 1.0e-13);
//! # Ok::<(), Box<dyn std::error::Error>>(())
//! ```

pub mod answers;
pub mod case;
pub mod command;
pub mod disk;
pub mod errors;
pub mod inquiry;
pub mod kinetics;
pub mod network;
pub mod rates;
pub mod run;
pub mod store;
pub mod units;
pub mod yaml;
