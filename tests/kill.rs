//! Runs that are killed at any moment: started again they come to the same run file, bit for bit,
//! whatever the number of threads, and leave nothing lying about.
//!
//! The moments are drawn from a seed, printed with every failure; `FROSTCLOCK_SEED` sets another.

mod support;

use frostclock::run::journal;
use std::fs;
use std::io::{BufRead, BufReader};
use std::path::Path;
use std::process::{Child, Stdio};
use std::thread::sleep;
use std::time::{Duration, Instant};
use support::{
    assert_same_run, command, datasets, folder_with, frostclock, names, send, shell_status,
    succeeds, three_places,
};
use tempfile::TempDir;

const CELLS: usize = 24;
/// Kills per number of threads, at the least.
const KILLS: usize = 12;
/// After so many kills a run is left alone: on a slow machine it might never get anywhere.
const MOST_PER_RUN: usize = 30;

fn seed() -> u64 {
    let seed = std::env::var("FROSTCLOCK_SEED")
        .ok()
        .and_then(|text| text.parse().ok())
        .unwrap_or(20);
    println!("FROSTCLOCK_SEED={seed}");
    seed
}

fn grid() -> TempDir {
    folder_with(&[
        "tests/data/grid.yaml",
        "tests/data/grid.csv",
        "tests/reference/small.yaml",
    ])
}

/// An uninterrupted run; and how long it took.
fn uninterrupted() -> (TempDir, Duration) {
    let folder = grid();
    let clock = Instant::now();
    succeeds(folder.path(), &["run", "grid.yaml", "--threads", "1"]);
    (folder, clock.elapsed())
}

/// How many cells the journal of the grid holds; None without a journal or a whole header.
fn in_journal(folder: &Path) -> Option<usize> {
    journal::read_only(&folder.join("grid.journal"))
        .ok()
        .map(|records| records.finished().count())
}

/// Stops `child` with `signal` after `delay`; its exit status as a shell reports it.
fn stop(mut child: Child, signal: &str, delay: Duration) -> i32 {
    sleep(delay);
    // It may have ended by itself: still a child until it is waited for, so that this harms nobody.
    send(signal, &child);
    shell_status(child.wait().expect("it ends"))
}

/// If it failed, a run on a machine that is taken away now and then would give other results than
/// one that is left in peace, or never come to an end.
#[test]
fn killed_at_any_moment_a_run_comes_to_the_same_bits() {
    let mut random = fastrand::Rng::with_seed(seed());
    let (whole, took) = uninterrupted();
    let whole = whole.path().join("grid.h5");
    for threads in ["1", "2"] {
        let (mut kills, mut halfway) = (0, Vec::new());
        while kills < KILLS {
            let folder = grid();
            let arguments = ["run", "grid.yaml", "--threads", threads];
            for attempt in 0.. {
                let child = command(folder.path(), &arguments)
                    .stderr(Stdio::null())
                    .spawn()
                    .expect("starts");
                if attempt == MOST_PER_RUN {
                    let ended = child.wait_with_output().expect("ends");
                    assert!(ended.status.success(), "{ended:?}");
                    break;
                }
                let (signal, number) = *random
                    .choice(&[
                        ("KILL", 9),
                        ("KILL", 9),
                        ("KILL", 9),
                        ("INT", 2),
                        ("TERM", 15),
                    ])
                    .expect("one");
                let delay = took.mul_f64(random.f64() * 0.35);
                let status = stop(child, signal, delay);
                if status == 0 {
                    break;
                }
                assert_eq!(status, 128 + number, "after {signal}");
                kills += 1;
                let finished = in_journal(folder.path());
                println!(
                    "{signal} after {delay:?}, {threads} thread(s): {finished:?} cells in the journal"
                );
                halfway.extend(finished.filter(|cells| (1..CELLS).contains(cells)));
            }
            assert_same_run(&whole, &folder.path().join("grid.h5"));
            assert_eq!(
                names(folder.path()),
                ["grid.csv", "grid.h5", "grid.yaml", "small.yaml"]
            );
        }
        assert!(
            halfway.len() >= 4,
            "hardly any kill came half-way: {halfway:?} of {kills}"
        );
    }
}

/// If it failed, Ctrl-C or a batch system's end of time would not be told from a failure, or lose
/// finished cells.
#[test]
fn a_signal_ends_a_run_with_its_status_and_keeps_the_cells() {
    for (signal, status) in [("INT", 130), ("TERM", 143)] {
        let folder = grid();
        let mut child = start(folder.path(), &["run", "grid.yaml", "--threads", "1"]);
        let mut lines = BufReader::new(child.stderr.take().expect("piped"))
            .lines()
            .map_while(Result::ok);
        assert!(
            lines.any(|line| line.contains("of 24 cells")),
            "no progress"
        );
        send(signal, &child);
        let said: Vec<String> = lines.collect();
        assert_eq!(shell_status(child.wait().expect("ends")), status);
        assert!(
            said.iter()
                .any(|line| line == "stopped; the same command goes on from the finished cells"),
            "{said:?}"
        );
        assert!(!folder.path().join("grid.h5").exists());
        let kept = in_journal(folder.path()).expect("a journal");
        assert!((1..CELLS).contains(&kept), "{kept} cells");
        let again = succeeds(folder.path(), &["run", "grid.yaml"]);
        assert!(
            again
                .err
                .contains(&format!("{kept} of 24 cells are finished: going on")),
            "{}",
            again.err
        );
    }
}

/// A run whose stderr is piped.
fn start(folder: &Path, arguments: &[&str]) -> Child {
    command(folder, arguments)
        .stderr(Stdio::piped())
        .spawn()
        .expect("starts")
}

/// If it failed, a look at a long run under way would show wrong numbers, or disturb it.
#[test]
fn gathering_a_run_under_way_shows_its_finished_cells_and_does_not_disturb_it() {
    let folder = grid();
    let mut child = start(folder.path(), &["run", "grid.yaml", "--threads", "2"]);
    let mut lines = BufReader::new(child.stderr.take().expect("piped"))
        .lines()
        .map_while(Result::ok);
    assert!(
        lines.any(|line| line.contains("of 24 cells")),
        "no progress"
    );
    // Held where it is, whatever that is, so that it cannot end before it was looked at.
    send("STOP", &child);
    let gathered = frostclock(folder.path(), &["gather", "grid.journal"]);
    send("CONT", &child);
    let rest: Vec<String> = lines.collect();
    assert_eq!(shell_status(child.wait().expect("ends")), 0, "{rest:?}");
    assert_eq!(gathered.status, 0, "{}", gathered.err);

    let partial =
        frostclock::store::open(&folder.path().join("grid.partial.h5")).expect("a run file");
    let last = frostclock::store::open(&folder.path().join("grid.h5")).expect("a run file");
    assert_eq!(partial.header().encode(), last.header().encode());
    let mut finished = 0;
    for cell in 0..CELLS {
        let numbers = |run: &frostclock::store::RunFile| run.cell(cell).expect("read").concat();
        match partial.statuses()[cell] as i8 {
            0 => {
                finished += 1;
                let pairs = numbers(&partial).into_iter().zip(numbers(&last));
                assert!(
                    pairs.into_iter().all(|(p, l)| p.to_bits() == l.to_bits()),
                    "cell {cell}"
                );
            }
            2 => assert!(numbers(&partial).iter().all(|x| x.is_nan()), "cell {cell}"),
            other => panic!("status {other} of cell {cell}"),
        }
    }
    assert!((1..CELLS).contains(&finished), "{finished} cells finished");
    assert!(
        gathered
            .err
            .contains(&format!("{finished} of 24 cells in grid.partial.h5")),
        "{}",
        gathered.err
    );
    let look = succeeds(folder.path(), &["look", "grid.partial.h5"]).out;
    let said = format!(
        "24 ({finished} done, 0 failed, {} not run)",
        CELLS - finished
    );
    assert!(look.contains(&said), "{look}");
}

/// If it failed, a kill in the last moments could cost the whole run, or litter the folder for ever.
#[test]
fn killed_while_the_file_is_written_a_run_still_comes_to_it() {
    let mut random = fastrand::Rng::with_seed(seed());
    let whole = three_places();
    succeeds(whole.path(), &["run", "three.yaml"]);
    let mut leftovers = 0;
    for round in 0..12 {
        let folder = three_places();
        let mut child = command(folder.path(), &["run", "three.yaml"])
            .stderr(Stdio::null())
            .spawn()
            .expect("starts");
        let is_part = |name: &String| name.contains(".part-");
        while child.try_wait().expect("a child").is_none()
            && !names_now(folder.path()).iter().any(is_part)
        {}
        sleep(Duration::from_micros(random.u64(0..9000)));
        child.kill().expect("killed, or ended before");
        child.wait().expect("ends");
        let left = names_now(folder.path());
        println!("round {round}: {left:?}");
        leftovers += usize::from(left.iter().any(is_part));
        succeeds(folder.path(), &["run", "three.yaml"]);
        assert_eq!(
            names(folder.path()),
            ["mini.yaml", "three.csv", "three.h5", "three.yaml"]
        );
        assert_same_run(
            &folder.path().join("three.h5"),
            &whole.path().join("three.h5"),
        );
    }
    assert!(leftovers > 0, "no kill came while the file was written");
}

/// The names in a folder in which files come and go.
fn names_now(folder: &Path) -> Vec<String> {
    let entries = fs::read_dir(folder).expect("a folder");
    entries
        .flatten()
        .map(|entry| entry.file_name().to_string_lossy().into_owned())
        .collect()
}

/// If it failed, part files of killed runs would pile up, or one that is being written, or a user's
/// own file, would be removed.
#[test]
fn only_part_files_that_nobody_writes_are_cleared_away() {
    let folder = three_places();
    let others = [
        "three.h5.part-2-of-it",
        "three.h5.part-old",
        "other.h5.part-1-0",
        "three.h5.part-8-0",
    ];
    for name in others
        .into_iter()
        .chain(["three.h5.part-1-0", "three.h5.part-99999-3"])
    {
        fs::write(folder.path().join(name), b"half of a file").expect("written");
    }
    // As HDF5 holds a file that it writes.
    let held = fs::File::open(folder.path().join("three.h5.part-8-0")).expect("opens");
    held.lock().expect("locked");
    let ended = succeeds(folder.path(), &["run", "three.yaml"]);
    let mut expected = vec!["mini.yaml", "three.csv", "three.h5", "three.yaml"];
    expected.extend(others);
    expected.sort_unstable();
    assert_eq!(names(folder.path()), expected, "{}", ended.err);
    assert_eq!(
        ended.err.matches("left by a run that was killed").count(),
        2,
        "{}",
        ended.err
    );
    assert!(datasets(&folder.path().join("three.h5")).contains_key("/abundance"));
}
