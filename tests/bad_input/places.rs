//! Mistakes on the command line, and in what lies around a case.

use super::support::edit;
use super::{Mistake, RUN, placed, typed};
use frostclock::case;
use frostclock::run::{Prepared, journal::Journal};
use std::fs;
use std::path::Path;

pub const TYPED: &[Mistake] = &[
    typed(
        "no such case",
        &["run", "four.yaml"],
        &["four.yaml: ", "no such file", "a case file"],
    ),
    typed(
        "a folder as case",
        &["run", "."],
        &[".: ", "a folder", "a case file"],
    ),
    typed(
        "no threads",
        &["run", "three.yaml", "--threads", "0"],
        &["--threads", "`0`", "1 or more"],
    ),
    typed(
        "threads in words",
        &["run", "three.yaml", "--threads", "all"],
        &["--threads", "`all`", "1 or more"],
    ),
    typed(
        "output of another kind",
        &["run", "three.yaml", "--output", "x.hdf"],
        &["--output", "`x.hdf`", "ending in .h5"],
    ),
    typed(
        "no such verb",
        &["launch"],
        &["error: unrecognized subcommand 'launch'"],
    ),
    typed(
        "no such run",
        &["look", "four.h5"],
        &[
            "four.h5: run file",
            "no such file",
            "a run file of frostclock",
        ],
    ),
    typed(
        "a table to look at",
        &["look", "three.csv"],
        &[
            "three.csv: run file",
            "not HDF5",
            "a run file of frostclock",
        ],
    ),
    typed(
        "a folder to look at",
        &["look", "."],
        &[".: run file", "a folder", "a run file of frostclock"],
    ),
    typed(
        "a place in words",
        &["at", "done.h5", "--time", "1 yr", "--near", "nonsense"],
        &["--near", "`nonsense`", "radius and height in au"],
    ),
    typed(
        "a place that is none",
        &["history", "done.h5", "--near", "1,NaN", "--species", "CO"],
        &["--near", "`1,NaN`", "radius and height in au"],
    ),
    typed(
        "time without unit",
        &["at", "done.h5", "--time", "1"],
        &["--time", "`1` without a unit", "a time"],
    ),
    typed(
        "time after the end",
        &["at", "done.h5", "--time", "1 Myr"],
        &[
            "--time",
            "`1 Myr`",
            "a time within the run, 0 yr to 1000 yr",
        ],
    ),
    typed(
        "negative time",
        &["at", "done.h5", "--time", "-1 yr"],
        &["--time", "`-1 yr`", "a time within the run"],
    ),
    typed(
        "species the run does not have",
        &["at", "done.h5", "--time", "1 yr", "--species", "CO,co2"],
        &["--species", "`co2`", "a species of the run"],
    ),
    typed(
        "species in the wrong case",
        &["history", "done.h5", "--near", "100,0", "--species", "co"],
        &["--species", "`co`", "such as CO, CO(ads)"],
    ),
    typed(
        "no species at all",
        &["at", "done.h5", "--time", "1 yr", "--species", ","],
        &["--species", "an empty list"],
    ),
    typed(
        "CSV in a folder that is missing",
        &["at", "done.h5", "--time", "1 yr", "--csv", "results/x.csv"],
        &["--csv", "results/x.csv", "a file that can be written"],
    ),
    typed(
        "a run in the place of the CSV",
        &["at", "done.h5", "--time", "1 yr", "--csv", "done.h5"],
        &["--csv", "`done.h5`", "ending in .csv"],
    ),
    typed(
        "a case to gather",
        &["gather", "three.yaml"],
        &[
            "three.yaml: journal",
            "no journal of frostclock",
            "a journal",
        ],
    ),
    typed(
        "nothing to gather",
        &["gather", "three.journal"],
        &["three.journal: journal", "no such file", "a journal"],
    ),
];

pub const PLACED: &[Mistake] = &[
    placed(
        "case that is not UTF-8",
        |folder| fs::write(folder.join("three.yaml"), b"title: \xff\xfe\n").unwrap(),
        RUN,
        &["three.yaml: ", "not UTF-8", "a case file"],
    ),
    placed(
        "network that is not UTF-8",
        |folder| fs::write(folder.join("mini.yaml"), b"network: \xff\n").unwrap(),
        RUN,
        &["three.yaml:3: network", "not UTF-8", "mini.yaml"],
    ),
    placed(
        "a file of another program in the place of the output",
        |folder| fs::write(folder.join("three.h5"), b"SIMPLE  =                    T").unwrap(),
        RUN,
        &[
            "three.h5: output",
            "no run of frostclock",
            "a run to replace, or no file",
        ],
    ),
    placed(
        "the same, and --fresh",
        |folder| fs::write(folder.join("three.h5"), b"SIMPLE  =                    T").unwrap(),
        &["run", "three.yaml", "--fresh"],
        &[
            "three.h5: output",
            "no run of frostclock",
            "a run to replace, or no file",
        ],
    ),
    placed(
        "an HDF5 file of another program in the place of the output",
        |folder| {
            let file = hdf5::File::create(folder.join("three.h5")).unwrap();
            file.new_dataset::<f64>()
                .shape(3)
                .create("abundance")
                .unwrap();
        },
        &["run", "three.yaml", "--fresh"],
        &[
            "three.h5: output",
            "no run of frostclock",
            "a run to replace, or no file",
        ],
    ),
    placed(
        "a folder in the place of the output",
        |folder| fs::create_dir(folder.join("three.h5")).unwrap(),
        RUN,
        &[
            "three.h5: output",
            "a folder",
            "a run to replace, or no file",
        ],
    ),
    placed(
        "the run of another case in the place of the output",
        |folder| {
            fs::copy(folder.join("done.h5"), folder.join("three.h5")).unwrap();
            edit(&folder.join("three.yaml"), "1 kyr", "2 kyr");
        },
        RUN,
        &[
            "three.h5: output",
            "a run of other inputs (`Three places in a thimble`)",
            "--fresh to replace it",
        ],
    ),
    placed(
        "a journal of garbage",
        |folder| fs::write(folder.join("three.journal"), [7; 999]).unwrap(),
        RUN,
        GARBAGE,
    ),
    placed(
        "a folder that cannot be written to",
        |_| {},
        &["run", "three.yaml", "--output", "/proc/three.h5"],
        &[
            "/proc/three.journal: journal",
            "`/proc`",
            "a place that can be written to",
        ],
    ),
    placed(
        "a journal of garbage, and --fresh",
        |folder| fs::write(folder.join("three.journal"), [7; 999]).unwrap(),
        &["run", "three.yaml", "--fresh"],
        GARBAGE,
    ),
    placed(
        "a folder in the place of the journal",
        |folder| fs::create_dir(folder.join("three.journal")).unwrap(),
        RUN,
        &[
            "three.journal: journal",
            "a folder",
            "a journal, or no file",
        ],
    ),
    placed(
        "the journal of another case",
        |folder| {
            journal_of_the_case(folder);
            edit(&folder.join("three.yaml"), "1 kyr", "2 kyr");
        },
        RUN,
        &[
            "three.journal: resolved case, line",
            "1 kyr",
            "2 kyr",
            "--fresh",
        ],
    ),
    placed(
        "the journal of another table",
        |folder| {
            journal_of_the_case(folder);
            edit(&folder.join("three.csv"), "28.0", "28.1");
        },
        RUN,
        &[
            "three.journal: conditions of cell 1",
            "found `T_dust [K] 28.0`",
            "expected `T_dust [K] 28.1`",
            "--fresh",
        ],
    ),
    placed(
        "a journal to look at",
        journal_of_the_case,
        &["look", "three.journal"],
        &[
            "three.journal: run file",
            "the journal of a run",
            "`gather`",
        ],
    ),
    placed(
        "a torn run file",
        |folder| {
            let bytes = fs::read(folder.join("done.h5")).unwrap();
            fs::write(folder.join("torn.h5"), &bytes[..bytes.len() / 2]).unwrap();
        },
        &["look", "torn.h5"],
        &["torn.h5: run file", "does not open", "a whole one"],
    ),
    placed(
        "a journal as the output of gather",
        journal_of_the_case,
        &["gather", "three.journal", "--output", "three.journal"],
        &["--output", "the journal itself", "another file"],
    ),
    placed(
        "a finished run as the output of gather",
        journal_of_the_case,
        &["gather", "three.journal", "--output", "done.h5"],
        &[
            "done.h5: output",
            "3 cells of this run, and 0 in the journal",
            "another --output",
        ],
    ),
    placed(
        "the run of another case as the output of gather",
        |folder| {
            edit(&folder.join("three.yaml"), "1 kyr", "2 kyr");
            journal_of_the_case(folder);
        },
        &["gather", "three.journal", "--output", "done.h5"],
        &[
            "done.h5: output",
            "a run of other inputs (`Three places in a thimble`)",
            "another --output",
        ],
    ),
    placed(
        "a table as the output of gather",
        journal_of_the_case,
        &["gather", "three.journal", "--output", "three.csv"],
        &["--output", "`three.csv`", "ending in .h5"],
    ),
];

const GARBAGE: &[&str] = &[
    "three.journal: journal",
    "no journal of frostclock",
    "a journal, or no file",
];

/// A journal as a run of the case leaves it before its first cell.
fn journal_of_the_case(folder: &Path) {
    let case = case::open(&folder.join("three.yaml")).expect("a sound case");
    let run = Prepared::new(&case).expect("a sound network");
    Journal::open_or_create(&folder.join("three.journal"), &run.header, false).expect("created");
}
