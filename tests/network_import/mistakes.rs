//! Wrong mappings and tables: what is said, and that nothing is written.

use crate::support::{contents, edit, folder_with, frostclock};
use std::fs;
use std::path::Path;

const COMMA: &[&str] = &["comma.csv", "comma.yaml"];
const FIXED: &[&str] = &["fixed.txt", "fixed.yaml"];

/// (files, edited file, old, new, what is said; the first at the start of the message)
type Mistake = (
    &'static [&'static str],
    &'static str,
    &'static str,
    &'static str,
    &'static [&'static str],
);

const MISTAKES: &[Mistake] = &[
    (
        COMMA,
        "comma.yaml",
        "network: comma",
        "netwrok: comma",
        &["comma.yaml:2: netwrok: found unknown key `netwrok`"],
    ),
    (
        COMMA,
        "comma.yaml",
        "mapping: 1",
        "mapping: 2",
        &["comma.yaml:1: mapping: found 2, expected 1"],
    ),
    (
        COMMA,
        "comma.yaml",
        "law: capture",
        "law: polar",
        &["comma.yaml:21: laws[1].law: found `polar`, expected one of `power_law`"],
    ),
    (
        COMMA,
        "comma.yaml",
        "rate: coefficient",
        "rate: coeficient",
        &[
            "comma.yaml:22: laws[2].rate: found the column `coeficient`, expected a column of comma.csv:2: nr, first, second, out 1",
        ],
    ),
    (
        COMMA,
        "comma.yaml",
        "{column: coefficient, times",
        "{column: coef, times",
        &["comma.yaml:24: laws[4].per_ionisation.column: found the column `coef`"],
    ),
    (
        COMMA,
        "comma.yaml",
        "note: [nr]",
        "note: [nr, row]",
        &["comma.yaml:31: note[1]: found the column `row`"],
    ),
    (
        COMMA,
        "comma.yaml",
        "label: kind",
        "label: sort",
        &["comma.yaml:18: label: found the column `sort`"],
    ),
    (
        COMMA,
        "comma.yaml",
        "label: kind\n",
        "",
        &[
            "comma.yaml:19: laws[0].label: found labels, expected `label: COLUMN`",
            "laws[5].label",
        ],
    ),
    (
        COMMA,
        "comma.yaml",
        "delimiter: \",\"",
        "delimiter: \"comma\"",
        &["comma.yaml:6: table.delimiter: found `comma`, expected one sign"],
    ),
    (
        COMMA,
        "comma.yaml",
        "quote: '\"'",
        "quote: ','",
        &["comma.yaml:7: table.quote: found `,`, the delimiter"],
    ),
    (
        COMMA,
        "comma.yaml",
        "header: true",
        "header: false",
        &["comma.yaml:4: table: found neither `header: true` nor `columns`"],
    ),
    (
        COMMA,
        "comma.yaml",
        "rename: {el: e-}",
        "rename: {el: electron}",
        &["comma.yaml:13: names.rename.el: found `electron`, unreadable at"],
    ),
    (
        COMMA,
        "comma.yaml",
        "unit: kJ/mol",
        "unit: kJ",
        &["comma.yaml:20: laws[0].barrier.unit: found `kJ`, expected one of K, J/mol, kJ/mol"],
    ),
    (
        COMMA,
        "comma.yaml",
        "times: 2.0",
        "times: 0",
        &[
            "comma.yaml:24: laws[4].per_ionisation.times: found 0, expected a finite number other than 0",
        ],
    ),
    (
        COMMA,
        "comma.yaml",
        "over: 1.3e-17",
        "over: 0",
        &["comma.yaml:23: laws[3].per_ionisation.over: found 0, expected a finite number above 0"],
    ),
    (
        COMMA,
        "comma.yaml",
        "over: 1.3e-17",
        "over: big",
        &["comma.yaml:23: laws[3].per_ionisation.over: found the text `big`, expected a number"],
    ),
    (
        COMMA,
        "comma.yaml",
        "[ion], marker: ray",
        "[ion], marker: hv",
        &["comma.yaml:23: laws[3].marker: found `hv`, expected a word of `names.markers`"],
    ),
    (
        COMMA,
        "comma.yaml",
        "langevin: coefficient, ",
        "rate: coefficient, ",
        &[
            "comma.yaml:21: laws[1].rate: found `rate`, expected of the law `capture` only langevin",
            "no `langevin`",
        ],
    ),
    (
        COMMA,
        "comma.yaml",
        ", reason: \"formed on grains, which the dust block does\"",
        "",
        &["comma.yaml:25: laws[5]: found no `reason`"],
    ),
    (
        COMMA,
        "comma.yaml",
        "valid: {low: from, high: to}\n",
        "",
        &[
            "comma.yaml:20: laws[0]: found no `valid` for the law `power_law`",
            "`capture`",
        ],
    ),
    (
        COMMA,
        "comma.yaml",
        "high: to}",
        "separator: to}",
        &["comma.yaml:26: valid: found another set of keys, expected `low` and `high`"],
    ),
    (
        COMMA,
        "comma.yaml",
        "below: extend",
        "below: extrapolate",
        &["comma.yaml:27: below: found `extrapolate`, expected one of `extend`"],
    ),
    (
        COMMA,
        "comma.yaml",
        "standing: recalled\n",
        "",
        &["comma.yaml", "standing"],
    ),
    (
        COMMA,
        "comma.yaml",
        "source: {column: where from}",
        "source: nobody",
        &["comma.yaml:30: source: found source `nobody`, expected a key that `sources` explains"],
    ),
    (
        COMMA,
        "comma.yaml",
        "within: {column: error %, given_as: percent}",
        "within: {given_as: percent}",
        &["comma.yaml:28: within: found neither or both of `column` and `value`"],
    ),
    (
        COMMA,
        "comma.yaml",
        "reactants: [first, second]\n",
        "",
        &["comma.yaml:15: change: found only one side or none"],
    ),
    (
        COMMA,
        "comma.csv",
        "out 2,out 3",
        "out 2,out 2",
        &["comma.csv:2: header: found the column `out 2` twice"],
    ),
    (
        COMMA,
        "comma.csv",
        "",
        "# nothing\n",
        &["comma.csv: header: found no line"],
    ),
    (
        COMMA,
        "comma.csv",
        "",
        "nr,first,second,out 1,out 2,out 3,kind,coefficient,exponent,threshold (kJ/mol),from,to,error %,where from\n",
        &["comma.csv: whole table: found no rows"],
    ),
    (
        COMMA,
        "comma.yaml",
        "reactants: [first, second]",
        "reactants: [nr]",
        &["comma.csv: rows of the table: found none of 54 rows that could be mapped"],
    ),
    (
        FIXED,
        "fixed.yaml",
        "l2: [14, 26]",
        "l2: [13, 26]",
        &["fixed.yaml:5: table.places.l2: found [13, 26], which overlaps `l1`"],
    ),
    (
        FIXED,
        "fixed.yaml",
        "l1: [1, 13]",
        "l1: [0, 13]",
        &["fixed.yaml:5: table.places.l1: found [0, 13], expected [first, last], counted from 1"],
    ),
    (
        FIXED,
        "fixed.yaml",
        "n: [77, 83]",
        "n: [83, 77]",
        &["fixed.yaml:5: table.places.n: found [83, 77]"],
    ),
    (
        FIXED,
        "fixed.yaml",
        "n: [77, 83]",
        "n: [77]",
        &["fixed.yaml:5: table.places.n: found 1 value, expected 2 values"],
    ),
    (
        FIXED,
        "fixed.yaml",
        "slope: n, barrier: t",
        "slope: b, barrier: t",
        &[
            "fixed.yaml:14: laws[2].slope: found the column `b`, expected a column of `table.places`: l1, l2",
        ],
    ),
    (
        FIXED,
        "fixed.yaml",
        "cells: fixed",
        "cells: fixed\n  delimiter: \",\"",
        &["fixed.yaml:5: table.delimiter: found `delimiter`, expected only `places`"],
    ),
];

fn arguments<'a>(files: &[&'a str]) -> Vec<&'a str> {
    let (table, mapping) = (files[0], files[1]);
    vec![
        "network", "import", table, "--map", mapping, "--output", "new.yaml",
    ]
}

fn folder(files: &[&str]) -> tempfile::TempDir {
    let paths: Vec<String> = files
        .iter()
        .map(|f| format!("tests/data/import/{f}"))
        .collect();
    let paths: Vec<&str> = paths.iter().map(String::as_str).collect();
    folder_with(&paths)
}

fn fault(folder: &Path, arguments: &[&str], says: &[&str]) -> Option<String> {
    let before = contents(folder);
    let ended = frostclock(folder, arguments);
    let start = format!("frostclock: {}", says[0]);
    let good = ended.status == 2
        && ended.err.starts_with(&start)
        && says.iter().all(|said| ended.err.contains(said))
        && contents(folder) == before;
    (!good).then(|| {
        format!(
            "expected 2 and {says:?}, ended with {}:\n{}",
            ended.status, ended.err
        )
    })
}

/// If it failed, a person would be left guessing what is wrong with their mapping or table.
#[test]
fn every_wrong_mapping_is_named() {
    let mut wrong = Vec::new();
    for (files, edited, old, new, says) in MISTAKES {
        let folder = folder(files);
        edit(&folder.path().join(edited), old, new);
        wrong.extend(fault(folder.path(), &arguments(files), says));
    }
    assert!(
        wrong.is_empty(),
        "{} of {}:\n{}",
        wrong.len(),
        MISTAKES.len(),
        wrong.join("\n")
    );
}

/// If it failed, a slip on the command line would cost a file.
#[test]
fn wrong_places_are_named() {
    let mut wrong = Vec::new();
    let mut meet = |prepare: fn(&Path), change: &dyn Fn(&mut Vec<&str>), says: &[&str]| {
        let folder = folder(COMMA);
        prepare(folder.path());
        let mut arguments = arguments(COMMA);
        change(&mut arguments);
        wrong.extend(fault(folder.path(), &arguments, says));
    };
    let nothing: fn(&Path) = |_| {};
    meet(
        nothing,
        &|a| a[2] = "none.csv",
        &["none.csv: found no such file or directory, expected a rate table"],
    );
    meet(
        nothing,
        &|a| a[4] = "none.yaml",
        &["none.yaml: found no such file or directory, expected a mapping file"],
    );
    meet(
        nothing,
        &|a| a[4] = ".",
        &[".: found is a directory, expected a mapping file"],
    );
    meet(
        nothing,
        &|a| a[6] = "new.yml",
        &["--output: found `new.yml`, expected a name ending in .yaml"],
    );
    meet(
        nothing,
        &|a| a[6] = "no/new.yaml",
        &["--output: found `no/new.yaml`"],
    );
    meet(
        nothing,
        &|a| {
            a[6] = "./comma.yaml";
            a.push("--force");
        },
        &["--output: found `./comma.yaml`, which is read"],
    );
    meet(
        nothing,
        &|a| a.extend(["--rejected", "comma.csv", "--force"]),
        &["--rejected: found `comma.csv`, which is read"],
    );
    meet(
        nothing,
        &|a| a.extend(["--rejected", "left.txt"]),
        &["--rejected: found `left.txt`, expected a name ending in .csv"],
    );
    meet(
        |at| fs::write(at.join("left.csv"), "mine").expect("written"),
        &|a| a.extend(["--rejected", "left.csv"]),
        &["--rejected: found `left.csv`, which exists"],
    );
    meet(
        nothing,
        &|a| a.extend(["--rejected", "new.yaml", "--force"]),
        &["--rejected: found `new.yaml`"],
    );
    meet(
        |at| fs::write(at.join("comma.csv"), b"first,b\nH\xe9,1\n").expect("written"),
        &|_| {},
        &["comma.csv:2: text of the table: found the byte 0xe9, which is no UTF-8"],
    );
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}
