//! Mistakes in what a user wrote: the case, the table of cells, the network.

use super::{Mistake, written};

pub const IN_THE_CASE: &[Mistake] = &[
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

pub const IN_THE_TABLE: &[Mistake] = &[
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

pub const IN_THE_NETWORK: &[Mistake] = &[
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
