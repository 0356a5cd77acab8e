//! What the command says to wrong input: which file and line, what was found, what was expected;
//! one message per mistake, and nothing written, overwritten or left behind.

#[path = "bad_input/files.rs"]
mod files;
#[path = "bad_input/places.rs"]
mod places;
mod support;

use files::{IN_THE_CASE, IN_THE_NETWORK, IN_THE_TABLE};
use places::{PLACED, TYPED};
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
