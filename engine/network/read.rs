//! Owns the way from the text of a network file to a checked [`Network`].
//!
//! It never expands: `expand` does. What a check looks for stands in `check`.

use super::check;
use super::findings::{self, Findings, Warning};
use super::groups::{self, Group, Head};
use super::layout::NetworkFile;
use super::names;
use super::roster::Roster;
use super::thermo::{self, Thermo};
use super::warn;
use crate::errors::InputError;
use crate::yaml::{self, Positions};
use std::path::{Path, PathBuf};

/// The layout this engine reads.
const LAYOUT: u32 = 1;

/// A network file that passed every check.
#[derive(Debug, Clone)]
pub struct Network {
    pub path: PathBuf,
    /// The file as it was, for keeping beside results.
    pub text: String,
    pub file: NetworkFile,
    pub positions: Positions,
    pub roster: Roster,
    /// The polynomials the file names; empty if it names none.
    pub thermo: Thermo,
    /// All reaction lines in the order of expansion.
    pub entries: Vec<Entry>,
    /// Products of photodesorption: per ice line, per channel, places in the roster.
    pub photodesorption: Vec<Vec<Vec<usize>>>,
    /// Ion and products per line of `dust.neutralisation`, places in the roster.
    pub neutralisation: Vec<(usize, Vec<usize>)>,
    /// Allowed but probably not meant, in the order of lines.
    pub warnings: Vec<Warning>,
}

/// A reaction line with its species found.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Entry {
    pub group: Group,
    /// Place in its group, from 0.
    pub index: usize,
    pub change: String,
    /// 1-based line of the file.
    pub line: usize,
    /// Places in the roster.
    pub reactants: Vec<usize>,
    pub products: Vec<usize>,
}

impl Entry {
    /// The key path of a field of this line.
    pub fn place(&self, field: &str) -> String {
        format!("{}[{}].{field}", self.group.key(), self.index)
    }

    /// The reactants in an order that does not depend on how they are written.
    pub fn reactant_set(&self) -> Vec<usize> {
        sorted(&self.reactants)
    }

    /// The products likewise.
    pub fn product_set(&self) -> Vec<usize> {
        sorted(&self.products)
    }
}

fn sorted(places: &[usize]) -> Vec<usize> {
    let mut places = places.to_vec();
    places.sort_unstable();
    places
}

/// Reads and checks a network from the text of the file `path`; reports the errors it finds, many
/// of them shortened. Polynomials that are not built in are read from the disk.
pub fn read(path: &Path, text: &str) -> Result<Network, Vec<InputError>> {
    read_with(path, text, None)
}

/// The same, with the text of the polynomials that the network names, where it is known already.
pub fn read_with(
    path: &Path,
    text: &str,
    polynomials: Option<&str>,
) -> Result<Network, Vec<InputError>> {
    read_whole(path, text, polynomials).map_err(|errors| findings::shortened(path, errors))
}

/// As [`read`], with all errors.
pub fn read_all(path: &Path, text: &str) -> Result<Network, Vec<InputError>> {
    read_whole(path, text, None)
}

fn read_whole(
    path: &Path,
    text: &str,
    polynomials: Option<&str>,
) -> Result<Network, Vec<InputError>> {
    let positions = yaml::positions(path, text).map_err(|error| vec![error])?;
    check_layout(path, &positions)?;
    let file: NetworkFile =
        yaml::fill(path, text, &positions).map_err(|error| vec![with_change(error, &positions)])?;
    let mut findings = Findings::new(path, &positions);
    let roster = Roster::collect(&file, &mut findings);
    let entries = entries(&file, &roster, &mut findings);
    let photodesorption = photodesorption(&file, &roster, &mut findings);
    let neutralisation = neutralisation(&file, &roster, &mut findings);
    check::all(&file, &roster, &entries, &mut findings);
    let thermo = match &file.thermo {
        Some(name) => polynomials_of(path, name, polynomials, &mut findings)?,
        None => Thermo::default(),
    };
    check::reversible(&file, &roster, &entries, &thermo, &mut findings);
    if !findings.none() {
        return Err(findings.finish());
    }
    let mut network = Network {
        path: path.to_path_buf(),
        text: text.to_string(),
        file,
        positions,
        roster,
        thermo,
        entries,
        photodesorption,
        neutralisation,
        warnings: Vec::new(),
    };
    network.warnings = warn::all(&network);
    (network.warnings).extend(check::improbable_reverses(&network));
    network.warnings.sort_by_key(|warning| warning.line);
    Ok(network)
}

impl Network {
    /// The line of a key path, or of what encloses it; 1 if nothing is known.
    pub fn line(&self, place: &str) -> usize {
        self.positions.nearest_line(place).unwrap_or(1)
    }
}

/// A file of another layout would fail on its keys; say what is really the matter.
fn check_layout(path: &Path, positions: &Positions) -> Result<(), Vec<InputError>> {
    match positions.text("layout") {
        Some(layout) if layout != LAYOUT.to_string() => {
            let found = format!("`{layout}`");
            let expected = format!("{LAYOUT}, the layout this version reads");
            let line = positions.line("layout");
            Err(vec![InputError::new(path, line, "layout", found, expected)])
        }
        _ => Ok(()),
    }
}

/// The polynomials called `name` in the network at `network`. What is wrong inside of them is
/// reported at once, with their own lines.
fn polynomials_of(
    network: &Path,
    name: &str,
    text: Option<&str>,
    findings: &mut Findings,
) -> Result<Thermo, Vec<InputError>> {
    let path = thermo::place(network, name);
    let text = match (text, thermo::built_in(name)) {
        (Some(text), _) | (None, Some(text)) => Ok(text.to_string()),
        (None, None) => match thermo::known(name) {
            Err(expected) => Err((format!("`{name}`"), expected)),
            Ok(()) => std::fs::read_to_string(&path).map_err(|error| {
                let found = format!("{} at {}", error, path.display());
                (found, "a readable file of polynomials".to_string())
            }),
        },
    };
    match text {
        Ok(text) => thermo::read(&path, &text),
        Err((found, expected)) => {
            findings.add("thermo", "thermo", found, expected);
            Ok(Thermo::default())
        }
    }
}

/// Adds the change (or name) to an error of form, whose entry is only a key path.
fn with_change(mut error: InputError, positions: &Positions) -> InputError {
    let Some(end) = error.entry.find(']') else {
        return error;
    };
    let item = &error.entry[..=end];
    let named = ["change", "name", "species", "ion"];
    let name = named
        .iter()
        .find_map(|key| positions.text(&format!("{item}.{key}")));
    if let Some(name) = name {
        error.entry = format!("{name} ({})", error.entry);
    }
    error
}

fn entries(file: &NetworkFile, roster: &Roster, findings: &mut Findings) -> Vec<Entry> {
    groups::heads(file)
        .iter()
        .filter_map(|head| entry(head, roster, findings))
        .collect()
}

/// Finds the species of one line; None with an error noted where that fails.
fn entry(head: &Head, roster: &Roster, findings: &mut Findings) -> Option<Entry> {
    let place = format!("{}[{}].change", head.group.key(), head.index);
    let change = match names::change(head.change) {
        Ok(change) => change,
        Err(error) => {
            findings.add(&place, head.change, error.found, error.expected);
            return None;
        }
    };
    let reactants = resolve(&change.reactants, roster, &place, head.change, findings);
    let products = resolve(&change.products, roster, &place, head.change, findings);
    Some(Entry {
        group: head.group,
        index: head.index,
        change: head.change.to_string(),
        line: findings.positions.nearest_line(&place).unwrap_or(1),
        reactants: reactants?,
        products: products?,
    })
}

/// Places of the species of one side, noting an error for each that is not known.
fn resolve(
    names: &[String],
    roster: &Roster,
    place: &str,
    entry: &str,
    findings: &mut Findings,
) -> Option<Vec<usize>> {
    let mut found = Vec::new();
    for (i, name) in names.iter().enumerate() {
        match roster.resolve(name) {
            Ok(species) => found.push(species),
            // The same name twice on one side is one mistake.
            Err(_) if names[..i].contains(name) => {}
            Err(error) => findings.add(place, entry, error.found, error.expected),
        }
    }
    (found.len() == names.len()).then_some(found)
}

/// Reads `OH + H` where only products are written.
fn products(
    text: &str,
    roster: &Roster,
    place: &str,
    entry: &str,
    findings: &mut Findings,
) -> Option<Vec<usize>> {
    match names::side(text) {
        Ok(names) => resolve(&names, roster, place, entry, findings),
        Err(error) => {
            findings.add(place, entry, error.found, error.expected);
            None
        }
    }
}

fn photodesorption(
    file: &NetworkFile,
    roster: &Roster,
    findings: &mut Findings,
) -> Vec<Vec<Vec<usize>>> {
    let mut all = Vec::new();
    for (i, ice) in file.ices.iter().enumerate() {
        let mut channels = Vec::new();
        for (j, channel) in ice.photodesorption.iter().enumerate() {
            let place = format!("ices[{i}].photodesorption[{j}].products");
            let entry = format!(
                "{} -> {}",
                names::adsorbed_name(&ice.species),
                channel.products
            );
            let products = products(&channel.products, roster, &place, &entry, findings);
            if let (Some(products), Some(from)) = (&products, roster.find(&ice.species)) {
                check::desorbed(products, from, roster, &place, &entry, findings);
            }
            channels.push(products.unwrap_or_default());
        }
        all.push(channels);
    }
    all
}

fn neutralisation(
    file: &NetworkFile,
    roster: &Roster,
    findings: &mut Findings,
) -> Vec<(usize, Vec<usize>)> {
    let mut all = Vec::new();
    let Some(dust) = &file.dust else { return all };
    for (i, line) in dust.neutralisation.iter().enumerate() {
        let place = format!("dust.neutralisation[{i}]");
        let entry = format!("{} -> {} (on dust)", line.ion, line.becomes);
        let ion = resolve(
            std::slice::from_ref(&line.ion),
            roster,
            &place,
            &entry,
            findings,
        );
        let becomes = products(&line.becomes, roster, &place, &entry, findings);
        if let (Some(ion), Some(becomes)) = (ion, becomes) {
            check::neutralised(ion[0], &becomes, roster, &place, &entry, findings);
            all.push((ion[0], becomes));
        }
    }
    all
}
