//! Wrong cases and tables: each is refused at its file, line and entry.

use super::*;

/// Everything a user can mistype in a case, with the line it must be reported on.
#[test]
fn wrong_cases_are_refused_where_they_are_wrong() {
    let replaced = |old: &str, new: &str| {
        let base = if SMALL.contains(old) { SMALL } else { RECIPE };
        assert!(base.contains(old), "{old}");
        base.replace(old, new)
    };
    for (old, new, line, entry, says) in [
        ("1 Myr", "1", 5, "clock.until", "without a unit"),
        (
            "1 Myr",
            "1 au",
            5,
            "clock.until",
            "the unit `au` of a length",
        ),
        (
            "until: 1 Myr, first: 1 yr",
            "until: 1 yr, first: 1 yr",
            5,
            "clock.first",
            "before `1 yr`",
        ),
        (
            "until: 1 Myr",
            "until: 1 Myr, at: [1 yr]",
            5,
            "clock",
            "both",
        ),
        ("first: 1 yr", "first: -1 yr", 5, "clock.first", "above 0"),
        (
            "per_decade: 10",
            "per_decade: 0",
            5,
            "clock.per_decade",
            "from 1 to 1000",
        ),
        (
            "per_decade: 10",
            "per_decade: 2.5",
            5,
            "clock.per_decade",
            "`2.5`",
        ),
        (
            "first: 1 yr, per_decade: 10",
            "first: 1.0e-9 s, per_decade: 1000",
            5,
            "clock",
            "snapshots",
        ),
        (
            "10 yr, 1 kyr",
            "1 kyr, 10 yr",
            15,
            "clock.at[1]",
            "after the one before",
        ),
        (
            "network: tiny.yaml",
            "network: tiny",
            2,
            "network",
            "standard, or a path ending in .yaml",
        ),
        (
            "network: tiny.yaml",
            "network: none.yaml",
            2,
            "network",
            "no such file at dir/none.yaml",
        ),
        ("cells.csv", "none.csv", 3, "disk.table", "no such file"),
        (
            "{table: cells.csv}",
            "{assumed_columns: {CO: 1.0e-5}}",
            3,
            "disk",
            "neither",
        ),
        (
            "table: cells.csv",
            "table: cells.csv, fields: [{name: a b, spectrum: draine}]",
            3,
            "disk.fields[0].name",
            "`a b`",
        ),
        (
            "composition: atoms",
            "composition: atoms, abundances: {H2: 0.5}",
            4,
            "start",
            "both",
        ),
        (
            "H2: 0.5",
            "H2: -0.5",
            14,
            "start.abundances.H2",
            "0 or more",
        ),
        ("title: t", "title: ' '", 1, "title", "empty"),
        (
            "title: t",
            "title: t\naccuracy: {relative: 0.5}",
            2,
            "accuracy.relative",
            "from 1e-12 to 0.1",
        ),
        (
            "title: t",
            "title: t\naccuracy: {smallest: 0}",
            2,
            "accuracy.smallest",
            "from 1e-40",
        ),
        ("title: t", "title: t\noutput: run.txt", 2, "output", ".h5"),
        (
            "charge_states: 2",
            "charge_states: 1.5",
            16,
            "grains.charge_states",
            "whole number",
        ),
        (
            "charge_states: 2",
            "charge_states: 2, active_layers: 0.5",
            16,
            "grains.active_layers",
            "from 1 to 1000",
        ),
        (
            "1.0e15 cm^-2",
            "1.0e15 cm^-3",
            16,
            "grains.site_density",
            "cm^-3",
        ),
        (
            "atoms: 0.55",
            "atoms: 1.5",
            16,
            "grains.hop_ratio.atoms",
            "at most 1",
        ),
        (
            "colliders: 0.6",
            "colliders: 0",
            17,
            "gas.colliders",
            "above 0",
        ),
        (
            "to: 100 au",
            "to: 0.5 au",
            8,
            "disk.recipe.radii.to",
            "beyond `1 au`",
        ),
        (
            "midplane: 20 K",
            "midplane: 0 K",
            7,
            "disk.recipe.temperature.midplane",
            "above 0",
        ),
        (
            "CO: 1.0e-4",
            "CO: 2.0",
            12,
            "disk.assumed_columns.CO",
            "from 0 to 1",
        ),
        (
            "5 keV",
            "4 keV",
            11,
            "disk.recipe.ionisation.xrays.hardness",
            "3 keV",
        ),
        (
            "to: 100 au, count: 3",
            "to: 1 pc, count: 3",
            4,
            "disk.recipe",
            "where there is gas",
        ),
        (
            "count: 3}",
            "count: 300000}",
            4,
            "disk.recipe",
            "at most 1000000 cells",
        ),
        (
            "up_to: 6",
            "upto: 6",
            9,
            "disk.recipe.heights.upto",
            "unknown key",
        ),
    ] {
        let text = replaced(old, new);
        let found = errors(&text, &[]);
        let error = &found[0];
        assert_eq!(
            (error.line, error.entry.as_str()),
            (Some(line), entry),
            "{new}: {error}"
        );
        assert!(error.to_string().contains(says), "{new}: {error}");
        assert_eq!(error.file, PathBuf::from("dir/x.yaml"), "{new}: {error}");
    }
    // All of the errors at once, not one per attempt.
    let both = SMALL.replace("1 Myr", "1").replace("tiny.yaml", "tiny");
    assert_eq!(errors(&both, &[]).len(), 2);
}

/// Everything that can be wrong with a table, with line and column.
#[test]
fn wrong_tables_are_refused_where_they_are_wrong() {
    let usual = |text: &str| text.to_string();
    let replaced = |old: &str, new: &str| {
        assert!(TABLE.contains(old), "{old}");
        TABLE.replacen(old, new, 1)
    };
    for (text, line, entry, says) in [
        (usual("# nothing\n\n"), None, "table", "found nothing"),
        (
            TABLE.lines().take(2).collect::<Vec<_>>().join("\n"),
            Some(2),
            "table",
            "only a header",
        ),
        (
            replaced("T_gas [K]", "T_gaz [K]"),
            Some(2),
            "column T_gaz [K]",
            "the unknown column `T_gaz`",
        ),
        (
            replaced("T_gas [K]", "T_gas"),
            Some(2),
            "column T_gas",
            "no unit",
        ),
        (
            replaced("T_gas [K]", "T_gas [K"),
            Some(2),
            "column T_gas [K",
            "closing",
        ),
        (
            replaced("T_gas [K]", "T_gas [au]"),
            Some(2),
            "column T_gas [au]",
            "`au` of a length",
        ),
        (
            replaced("T_gas [K]", "T_gas [C]"),
            Some(2),
            "column T_gas [C]",
            "unknown unit `C`",
        ),
        (
            replaced("T_gas [K]", "n_H [cm^-3]"),
            Some(2),
            "column n_H",
            "it twice",
        ),
        (
            replaced("T_gas [K]", "T_dust [K]"),
            Some(2),
            "column T_gas",
            "no such column",
        ),
        (
            replaced("AV_sky [mag]", "zeta_xray [s^-1]"),
            Some(2),
            "column AV_sky",
            "no such column",
        ),
        (
            replaced("UV_sky", "UV_moon"),
            Some(2),
            "column UV_moon [Habing]",
            "unknown field `moon`",
        ),
        (
            replaced("N_CO_sky", "N_CQ_sky"),
            Some(2),
            "column N_CQ_sky [cm^-2]",
            "species `CQ`",
        ),
        (
            replaced("N_CO_sky", "N_CO_moon"),
            Some(2),
            "column N_CO_moon [cm^-2]",
            "unknown field `moon`",
        ),
        (replaced("1e9", "many"), Some(3), "column n_H", "`many`"),
        (replaced("1e9", "NaN"), Some(3), "column n_H", "`NaN`"),
        (replaced("1e9", "inf"), Some(3), "column n_H", "`inf`"),
        (replaced("1e9", "-1e9"), Some(3), "column n_H", "above 0"),
        (replaced("1e9", ""), Some(3), "column n_H", "found nothing"),
        (
            replaced("1e10,30", "1e10,0"),
            Some(4),
            "column T_gas",
            "above 0",
        ),
        (
            replaced("3.4,4", "-3.4,4"),
            Some(4),
            "column UV_sky",
            "0 or more",
        ),
        (
            replaced("0.25", "1.25"),
            Some(3),
            "column shield_N2_sky",
            "from 0 to 1",
        ),
        (replaced("1e9,20", "1e9"), Some(3), "table", "10 values"),
        (
            replaced("1e9,20", "1e9,20,20"),
            Some(3),
            "table",
            "12 values",
        ),
    ] {
        let found = errors(SMALL, &[("dir/cells.csv", &text)]);
        let error = &found[0];
        assert_eq!((error.line, error.entry.as_str()), (line, entry), "{error}");
        assert!(error.to_string().contains(says), "{says}: {error}");
        assert_eq!(error.file, PathBuf::from("dir/cells.csv"), "{error}");
    }
}
