//! The example of networks/README.md, as a person would type it in.

use crate::support::succeeds;
use frostclock::network;
use std::fs;
use std::path::Path;

/// The indented block behind `title` in a text of Markdown.
fn block(text: &str, title: &str) -> String {
    let (_, after) = text.split_once(title).expect("the title");
    let lines = after.lines().skip_while(|line| !line.starts_with("    "));
    let lines = lines.take_while(|line| line.starts_with("    "));
    lines.map(|line| format!("{}\n", &line[4..])).collect()
}

/// If it failed, the first thing a person tries would not do what the manual says.
#[test]
fn the_example_of_the_manual_works() {
    let manual = include_str!("../../networks/README.md");
    let (_, manual) = manual
        .split_once("## Bringing your own table")
        .expect("the section");
    let folder = tempfile::tempdir().expect("a folder");
    for name in ["table.csv", "mapping.yaml"] {
        let text = block(manual, &format!("`{name}`:"));
        fs::write(folder.path().join(name), text).expect("written");
    }
    let ended = succeeds(
        folder.path(),
        &[
            "network",
            "import",
            "table.csv",
            "--map",
            "mapping.yaml",
            "--output",
            "new.yaml",
        ],
    );
    assert!(
        ended.err.contains("7 rows read, 6 mapped to 5 entries"),
        "{}",
        ended.err
    );
    assert!(
        ended.out.starts_with("line 9: found the label `guess`"),
        "{}",
        ended.out
    );
    let text = fs::read_to_string(folder.path().join("new.yaml")).expect("read");
    let made = network::read(Path::new("new.yaml"), &text).expect("a network");
    assert_eq!(made.file.gas[0].pieces.len(), 2);
    // 14 kJ/mol over R = 8.314462618 J/mol/K, to 12 digits.
    assert!((made.file.gas[0].pieces[1].barrier - 14.0e3 / 8.314462618).abs() < 1e-5);
}
