//! What the verbs that read a run print and write is what the file holds.

mod support;

use frostclock::answers::interpolate;
use std::process::Stdio;
use support::{command, csv, finished, shell_status, succeeds};

fn bits(text: &str) -> u64 {
    text.parse::<f64>()
        .unwrap_or_else(|_| panic!("`{text}` is no number"))
        .to_bits()
}

/// If it failed, a figure drawn from the CSV would not show what was computed.
#[test]
fn a_history_gives_the_stored_bits() {
    let (folder, run) = finished();
    let place = [
        "--near",
        "100,19",
        "--species",
        "CO,H3+,H2O(ads)",
        "--csv",
        "h.csv",
    ];
    let ended = succeeds(
        folder.path(),
        &[&["history", "three.h5"], &place[..]].concat(),
    );
    assert!(
        ended
            .err
            .contains("cell 1 at R = 100.0000 au, z = 20.0000 au"),
        "{}",
        ended.err
    );
    let (heads, rows) = csv(&folder.path().join("h.csv"));
    assert_eq!(heads, ["time [yr]", "CO", "H3+", "H2O(ads)"]);
    assert_eq!(rows.len(), run.header().times_yr.len());
    assert_eq!(ended.out.lines().count(), rows.len() + 1);
    for row in rows.values() {
        let time = run
            .header()
            .times_yr
            .iter()
            .position(|t| t.to_bits() == bits(&row[0]));
        let state = run.state(1, time.expect("a stored time")).expect("read");
        for (name, value) in heads.iter().zip(row).skip(1) {
            let stored = state[run.header().find(name).expect("a species")];
            assert_eq!(bits(value), stored.to_bits(), "{name} at {} yr", row[0]);
        }
    }
}

/// If it failed, values at a time would be those of another time, cell or species.
#[test]
fn a_time_gives_the_stored_bits_or_the_interpolation() {
    let (folder, run) = finished();
    let header = run.header();
    let csv_path = folder.path().join("at.csv");
    // On snapshots (the first, one in between in another unit, the last) and between them.
    for (text, years) in [
        ("0 yr", 0.0),
        ("0.1 kyr", 100.0),
        ("1 kyr", 1000.0),
        ("55 yr", 55.0),
        ("0.3 yr", 0.3),
    ] {
        let expected = |cell: usize, name: &str| {
            let history = run
                .history(cell, header.find(name).expect("a species"))
                .expect("read");
            interpolate::at(
                &header.times_yr,
                &history,
                header.tolerances.smallest,
                years,
            )
            .expect("within")
        };
        let all = succeeds(
            folder.path(),
            &["at", "three.h5", "--time", text, "--csv", "at.csv"],
        );
        let on_snapshot = header.times_yr.contains(&years);
        let start = if on_snapshot {
            "snapshot "
        } else {
            "interpolated between"
        };
        assert!(all.err.starts_with(start), "{}", all.err);
        let (heads, rows) = csv(&csv_path);
        assert_eq!((heads.len(), rows.len()), (4 + header.species.len(), 3));
        for (cell, row) in rows.values().enumerate() {
            for (name, value) in heads.iter().zip(row).skip(4) {
                assert_eq!(
                    bits(value),
                    expected(cell, name).to_bits(),
                    "{name} in {cell} at {text}"
                );
            }
        }
        let place = [
            "--near",
            "100,40",
            "--species",
            "HCO+,CO",
            "--csv",
            "at.csv",
        ];
        let one = succeeds(
            folder.path(),
            &[&["at", "three.h5", "--time", text], &place[..]].concat(),
        );
        assert_eq!(one.out.lines().count(), 3, "{}", one.out);
        let (_, rows) = csv(&csv_path);
        assert_eq!(rows.keys().collect::<Vec<_>>(), ["CO", "HCO+"]);
        for (name, row) in &rows {
            assert_eq!(
                bits(&row[1]),
                expected(2, name).to_bits(),
                "{name} at {text}"
            );
        }
    }
    // On a snapshot that is the stored state itself, whatever the interpolation does.
    let state = run.state(0, header.times_yr.len() - 1).expect("read");
    succeeds(
        folder.path(),
        &[
            "at", "three.h5", "--time", "1 kyr", "--near", "100,0", "--csv", "at.csv",
        ],
    );
    let (_, rows) = csv(&csv_path);
    for (info, stored) in header.species.iter().zip(state) {
        assert_eq!(
            bits(&rows[&info.name][1]),
            stored.to_bits(),
            "{}",
            info.name
        );
    }
}

/// If it failed, `| head -1` would end in a panic or an error.
#[test]
fn a_reader_that_goes_away_is_no_error() {
    let (folder, _) = finished();
    for arguments in [
        &["look", "three.h5", "--network"][..],
        &["look", "three.h5"],
        &["history", "three.h5", "--near", "100,0", "--species", "CO"],
        &["at", "three.h5", "--time", "1 kyr"],
        &["preview", "three.yaml"],
        &["--help"],
    ] {
        // Closed before anything is written.
        let mut child = command(folder.path(), arguments);
        let mut child = child
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .expect("starts");
        drop(child.stdout.take());
        let ended = child.wait_with_output().expect("ends");
        let err = String::from_utf8_lossy(&ended.stderr);
        assert_eq!(ended.status.code(), Some(0), "{arguments:?}: {err}");
        assert!(
            !err.contains("panic") && !err.contains("rror"),
            "{arguments:?}: {err}"
        );
    }
    // And a reader of messages that goes away costs nothing either: neither success nor failure.
    for (arguments, status) in [
        (&["run", "three.yaml", "--fresh"][..], 0),
        (&["run", "four.yaml"], 2),
    ] {
        let mut child = command(folder.path(), arguments);
        let mut child = child
            .stdout(Stdio::null())
            .stderr(Stdio::piped())
            .spawn()
            .expect("starts");
        drop(child.stderr.take());
        assert_eq!(
            shell_status(child.wait().expect("ends")),
            status,
            "{arguments:?}"
        );
    }
}

/// If it failed, scripts that only want warnings would get chatter, or results in the wrong stream.
#[test]
fn results_go_to_stdout_and_quiet_keeps_the_rest() {
    let (folder, _) = finished();
    for arguments in [
        &["run", "three.yaml", "--fresh", "--quiet"][..],
        &["--quiet", "at", "three.h5", "--time", "7 yr"],
    ] {
        assert_eq!(succeeds(folder.path(), arguments).err, "");
    }
    assert_eq!(
        succeeds(folder.path(), &["run", "three.yaml", "--fresh"]).out,
        ""
    );
    let version = succeeds(folder.path(), &["--version"]).out;
    assert_eq!(
        version.trim(),
        concat!("frostclock ", env!("CARGO_PKG_VERSION"))
    );
}
