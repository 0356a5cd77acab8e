//! What the command says to wrong input: which file and line, what was found, what was expected;
//! one message per mistake, and nothing written, overwritten or left behind.

mod support;

use frostclock::case;
use frostclock::run::{Prepared, journal::Journal};
use std::fs;
use std::path::Path;
use support::{Ended, contents, edit, frostclock, succeeds, three_places};

/// One mistake. `edits` are (file, old, new) as in [`support::edit`]; `says` must stand in the one
/// message, the first of them at its start.
struct Mistake {
    what: &'static str,
    edits: &'static [(&'static str, &'static str, &'static str)],
    prepare: fn(&Path),
    arguments: &'static [&'static str],
    says: &'static [&'static str],
}

const RUN: &[&str] = &["run", "three.yaml"];

/// A mistake in a file, met by `run`.
const fn written(
    what: &'static str,
    edits: &'static [(&'static str, &'static str, &'static str)],
    says: &'static [&'static str],
) -> Mistake {
    Mistake {
        what,
        edits,
        prepare: |_| {},
        arguments: RUN,
        says,
    }
}

/// A mistake on the command line.
const fn typed(
    what: &'static str,
    arguments: &'static [&'static str],
    says: &'static [&'static str],
) -> Mistake {
    Mistake {
        what,
        edits: &[],
        prepare: |_| {},
        arguments,
        says,
    }
}

/// A mistake in what lies around.
const fn placed(
    what: &'static str,
    prepare: fn(&Path),
    arguments: &'static [&'static str],
    says: &'static [&'static str],
) -> Mistake {
    Mistake {
        what,
        edits: &[],
        prepare,
        arguments,
        says,
    }
}

const IN_THE_CASE: &[Mistake] = &[
    written(
        "unknown species in the start",
        &[(
            "three.yaml",
            "{composition: ices}",
            "{abundances: {H2: 0.5, C6H6: 1.0e-9}}",
        )],
        &[
            "three.yaml:8: start: C6H6",
            "the network does not have",
            "a species of the network `mini`",
        ],
    ),
    written(
        "unknown composition",
        &[("three.yaml", "composition: ices", "composition: soup")],
        &["three.yaml:8: start.composition", "`soup`", "ices"],
    ),
    written(
        "charge that does not balance",
        &[(
            "three.yaml",
            "{composition: ices}",
            "{abundances: {H2: 0.5, HCO+: 1.0e-9, e-: 2.0e-9}}",
        )],
        &[
            "three.yaml:8: start: e-",
            "charge of -1",
            "charges that balance",
        ],
    ),
    written(
        "neither composition nor abundances",
        &[("three.yaml", "{composition: ices}", "{}")],
        &[
            "three.yaml:8: start",
            "neither",
            "`composition` or `abundances`",
        ],
    ),
    written(
        "negative abundance",
        &[(
            "three.yaml",
            "{composition: ices}",
            "{abundances: {H2: -0.5}}",
        )],
        &["three.yaml:8: start.abundances.H2", "`-0.5`", "0 or more"],
    ),
    written(
        "missing unit",
        &[("three.yaml", "until: 1 kyr", "until: 1000")],
        &[
            "three.yaml:9: clock.until",
            "`1000` without a unit",
            "a time",
            "yr",
        ],
    ),
    written(
        "wrong unit",
        &[("three.yaml", "until: 1 kyr", "until: 1 au")],
        &["three.yaml:9: clock.until", "`1 au`", "a time"],
    ),
    written(
        "unknown key",
        &[("three.yaml", "accuracy: {relative", "accuracy: {relativ")],
        &[
            "three.yaml:10: accuracy.relativ",
            "unknown key `relativ`",
            "`relative`",
        ],
    ),
    written(
        "duplicate key",
        &[("three.yaml", "output:", "title: again\noutput:")],
        &[
            "three.yaml:11: title",
            "a second `title`",
            "line 2",
            "every key once",
        ],
    ),
    written(
        "missing key",
        &[("three.yaml", "start: {composition: ices}\n", "")],
        &["three.yaml:", "no `start`", "`start` with a value"],
    ),
    written(
        "YAML that is none",
        &[("three.yaml", "{composition: ices}", "{composition: ices")],
        &["three.yaml:", "expected valid YAML"],
    ),
    written(
        "empty case",
        &[("three.yaml", "", "")],
        &["three.yaml: whole file", "no entries", "keys with values"],
    ),
    written(
        "first snapshot after the end",
        &[("three.yaml", "first: 1 yr", "first: 1 Myr")],
        &[
            "three.yaml:9: clock.first",
            "`1 Myr`",
            "a time before `1 kyr`",
        ],
    ),
    written(
        "unknown spectrum",
        &[("three.yaml", "spectrum: draine", "spectrum: candle")],
        &[
            "three.yaml:7: ",
            "`sky`",
            "`candle`",
            "draine, black_body_4000K",
        ],
    ),
    written(
        "no network of that name",
        &[("three.yaml", "mini.yaml", "maxi")],
        &[
            "three.yaml:3: network",
            "`maxi`",
            "standard, or a path ending in .yaml",
        ],
    ),
    written(
        "network file missing",
        &[("three.yaml", "mini.yaml", "maxi.yaml")],
        &[
            "three.yaml:3: network",
            "no such file",
            "maxi.yaml",
            "a readable file",
        ],
    ),
    written(
        "table missing",
        &[("three.yaml", "table: three.csv", "table: four.csv")],
        &[
            "three.yaml:5: disk.table",
            "no such file",
            "four.csv",
            "a readable file",
        ],
    ),
    written(
        "output of another kind",
        &[("three.yaml", "three.h5", "three.fits")],
        &["three.yaml:11: output", "`three.fits`", "ending in .h5"],
    ),
    written(
        "output in a folder that is missing",
        &[("three.yaml", "three.h5", "results/three.h5")],
        &[
            "results/three.h5: output",
            "no folder `results`",
            "a folder that exists",
        ],
    ),
    written(
        "output in a folder that is a file",
        &[("three.yaml", "three.h5", "three.csv/three.h5")],
        &[
            "three.csv/three.h5: output",
            "the file `three.csv`",
            "a folder that exists",
        ],
    ),
];

const IN_THE_TABLE: &[Mistake] = &[
    written(
        "negative density",
        &[("three.csv", "20.0,1.0e7", "20.0,-1.0e7")],
        &["three.csv:4: column n_H", "`-1.0e7`", "above 0"],
    ),
    written(
        "not a number",
        &[("three.csv", "30.0,28.0", "NaN,28.0")],
        &["three.csv:4: column T_gas", "`NaN`", "above 0"],
    ),
    written(
        "duplicate column",
        &[("three.csv", "T_dust [K]", "T_gas [K]")],
        &["three.csv:2: column T_gas", "it twice", "every column once"],
    ),
    written(
        "empty",
        &[("three.csv", "", "")],
        &["three.csv: table", "nothing", "a header line"],
    ),
    written(
        "without cells",
        &[(
            "three.csv",
            "",
            "radius [au],height [au],n_H [cm^-3],T_gas [K],UV_sky [Draine],AV_sky [mag],zeta_cosmic [s^-1]\n",
        )],
        &["three.csv:1: table", "only a header", "at least one line"],
    ),
    written(
        "without a required column",
        &[(
            "three.csv",
            "",
            "radius [au],height [au],n_H [cm^-3],T_gas [K],UV_sky [Draine],AV_sky [mag]\n1.0,0.0,1.0e9,20.0,1.0,1.0\n",
        )],
        &[
            "three.csv:1: column zeta_cosmic",
            "no such column",
            "`zeta_cosmic [s^-1]`",
        ],
    ),
    written(
        "ragged row",
        &[("three.csv", "20.0,1.0e7,", "20.0,")],
        &["three.csv:4: table", "7 values", "8, one per column"],
    ),
    written(
        "column without a unit",
        &[("three.csv", "n_H [cm^-3]", "n_H")],
        &[
            "three.csv:2: column n_H",
            "no unit",
            "`n_H [unit]`",
            "cm^-3",
        ],
    ),
    written(
        "column in a wrong unit",
        &[("three.csv", "n_H [cm^-3]", "n_H [g/cm^3]")],
        &["three.csv:2: column n_H", "g/cm^3", "cm^-3"],
    ),
    written(
        "unknown column",
        &[("three.csv", "T_dust [K]", "T_grain [K]")],
        &["three.csv:2: column T_grain", "unknown", "T_dust"],
    ),
];

const IN_THE_NETWORK: &[Mistake] = &[
    written(
        "unbalanced reaction",
        &[("mini.yaml", "H2+ + H2 -> H3+ + H,", "H2+ + H2 -> H3+,")],
        &[
            "mini.yaml:25: H2+ + H2 -> H3+",
            "1 H too few",
            "the same atoms and charge on both sides",
        ],
    ),
    written(
        "unknown key of a reaction",
        &[("mini.yaml", "at_300K: 2.1e-9", "at_300k: 2.1e-9")],
        &[
            "mini.yaml:25: H2+ + H2 -> H3+ + H",
            "unknown key `at_300k`",
            "`at_300K`",
        ],
    ),
    written(
        "unknown species of a reaction",
        &[("mini.yaml", "H2+ + H2 -> H3+ + H,", "D2+ + H2 -> H3+ + H,")],
        &["mini.yaml:25: D2+ + H2 -> H3+ + H", "`D2+`", "species"],
    ),
    written(
        "the same reaction twice",
        &[(
            "mini.yaml",
            "HCO+ + e- -> CO + H, at",
            "e- + H3+ -> H + H2, at",
        )],
        &[
            "mini.yaml:28: e- + H3+ -> H + H2",
            "the same change as line 27",
            "`adds: true`",
        ],
    ),
    written(
        "text for a number",
        &[("mini.yaml", "at_300K: 2.1e-9", "at_300K: fast")],
        &["mini.yaml:25: H2+ + H2 -> H3+ + H", "`fast`", "a number"],
    ),
    written(
        "of a later layout",
        &[("mini.yaml", "layout: 1", "layout: 7")],
        &[
            "mini.yaml:3: layout",
            "`7`",
            "1, the layout this version reads",
        ],
    ),
    written(
        "not a network",
        &[("mini.yaml", "", "- 1\n- 2\n")],
        &["mini.yaml:1: whole file", "a list", "keys with values"],
    ),
];

const TYPED: &[Mistake] = &[
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

const PLACED: &[Mistake] = &[
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

/// If it failed, a practitioner would be left guessing what to correct, or lose a file.
#[test]
fn every_mistake_is_named_once_and_harms_nothing() {
    let done = three_places();
    succeeds(done.path(), &["run", "three.yaml", "--output", "done.h5"]);
    let lists = [IN_THE_CASE, IN_THE_TABLE, IN_THE_NETWORK, TYPED, PLACED];
    let all: Vec<&Mistake> = lists.into_iter().flatten().collect();
    let mut wrong = Vec::new();
    for mistake in &all {
        let folder = three_places();
        fs::copy(done.path().join("done.h5"), folder.path().join("done.h5")).expect("copied");
        for (file, old, new) in mistake.edits {
            edit(&folder.path().join(file), old, new);
        }
        (mistake.prepare)(folder.path());
        let before = contents(folder.path());
        let ended = frostclock(folder.path(), mistake.arguments);
        let mut faults = faults(mistake, &ended);
        if contents(folder.path()) != before {
            faults.push("a file was changed, made or removed".to_string());
        }
        println!("{}:\n{}", mistake.what, ended.err);
        if !faults.is_empty() {
            wrong.push(format!(
                "{}: {}\n{}",
                mistake.what,
                faults.join("; "),
                ended.err
            ));
        }
    }
    assert!(all.len() >= 30);
    assert!(
        wrong.is_empty(),
        "{} of {} mistakes:\n\n{}",
        wrong.len(),
        all.len(),
        wrong.join("\n")
    );
}

/// What is wrong with what was said.
fn faults(mistake: &Mistake, ended: &Ended) -> Vec<String> {
    let mut faults = Vec::new();
    if ended.status != 2 {
        faults.push(format!("exit status {}", ended.status));
    }
    if !ended.out.is_empty() {
        faults.push(format!("on stdout: {}", ended.out));
    }
    // Words of Rust, not of the trade.
    for word in [
        "panicked", "Some(", "None", "struct", "enum", "f64", "usize", "Error {", "os error",
        "\\\"",
    ] {
        if ended.err.contains(word) {
            faults.push(format!("`{word}`"));
        }
    }
    let messages: Vec<&str> = ended
        .err
        .lines()
        .filter(|line| line.contains(": found ") || line.contains("error: "))
        .collect();
    let [message] = messages.as_slice() else {
        faults.push(format!("{} messages", messages.len()));
        return faults;
    };
    let message = message.strip_prefix("frostclock: ").unwrap_or(message);
    if !message.contains("error: ") && !message.contains(", expected ") {
        faults.push("no expectation".to_string());
    }
    let (start, rest) = mistake.says.split_first().expect("words to look for");
    if !message.starts_with(start) {
        faults.push(format!("does not start with `{start}`"));
    }
    faults.extend(
        rest.iter()
            .filter(|words| !message.contains(**words))
            .map(|words| format!("no `{words}`")),
    );
    faults
}

/// Two mistakes in one file: both are reported at once, each with its line.
#[test]
fn two_mistakes_give_two_messages() {
    let folder = three_places();
    edit(&folder.path().join("three.yaml"), "1 kyr", "1000");
    edit(
        &folder.path().join("three.yaml"),
        "relative: 1.0e-5",
        "relative: -1.0e-5",
    );
    let ended = frostclock(folder.path(), RUN);
    assert_eq!(ended.status, 2);
    for line in [
        "three.yaml:9: clock.until: found",
        "three.yaml:10: accuracy.relative: found",
    ] {
        assert_eq!(ended.err.matches(line).count(), 1, "{}", ended.err);
    }
}
