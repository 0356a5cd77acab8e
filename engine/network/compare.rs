//! Owns what differs between two networks, line by line and key by key.
//!
//! It never judges which of them is right.

use super::collisions;
use super::groups::Group;
use super::read::{Entry, Network};
use crate::units::number_text;
use serde_yaml::{Mapping, Value};
use std::collections::{BTreeMap, BTreeSet};

/// Temperatures (K) at which coefficients are compared.
pub const COMPARED_AT: [f64; 3] = [10.0, 100.0, 300.0];

/// Something that is in one network only, or in both with other content.
#[derive(Debug, Clone, PartialEq)]
pub struct Difference {
    /// The list of the file: `species`, `gas`, `ices`, `sources`, ...
    pub part: String,
    /// The change, name or key, as the first network has it.
    pub entry: String,
    /// Line in the one and in the other network; None where it is missing.
    pub lines: [Option<usize>; 2],
    /// What is different about an entry of both.
    pub keys: Vec<KeyChange>,
    /// The other coefficient over the first at [`COMPARED_AT`], where both are two-body laws
    /// (high-pressure limit of a falloff; all lines of the change summed) and not the same.
    pub ratio: Option<[f64; 3]>,
}

/// A key with its values; `-` where there is none.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct KeyChange {
    pub key: String,
    pub values: [String; 2],
}

/// Everything that differs, in the order of the file's lists; within a list first what only `one`
/// has, then what only `other` has, then what both have.
///
/// Reactions are the same if they have the same reactants and products, whatever the order, and
/// the same kind of cause. Comments, the order of lines and the order of keys do not count.
pub fn compare(one: &Network, other: &Network) -> Vec<Difference> {
    let sides = [Side::new(one), Side::new(other)];
    let mut all = Vec::new();
    for key in ["network", "about"] {
        let values = sides.each_ref().map(|s| text(s.root.get(key)));
        if values[0] != values[1] {
            let key = key.to_string();
            all.push(Difference {
                part: "head".to_string(),
                entry: key.clone(),
                lines: sides.each_ref().map(|s| s.network.positions.line(&key)),
                keys: vec![KeyChange { key, values }],
                ratio: None,
            });
        }
    }
    for part in ["sources", "spectra"] {
        let named = sides.each_ref().map(|side| side.named(part));
        matched(&named, &mut all);
    }
    for (part, name) in [
        ("species", "name"),
        ("compositions", "name"),
        ("shielding", "name"),
    ] {
        let listed = sides.each_ref().map(|side| side.listed(part, name));
        matched(&listed, &mut all);
    }
    let reactions = sides.each_ref().map(Side::reactions);
    let before = all.len();
    matched(&reactions, &mut all);
    for difference in &mut all[before..] {
        difference.ratio = ratio(&sides, difference);
    }
    let ices = sides.each_ref().map(|side| side.listed("ices", "species"));
    matched(&ices, &mut all);
    let dust = sides.each_ref().map(Side::dust);
    matched(&dust, &mut all);
    all
}

/// One entry of a list: where it stands and its keys.
struct Item {
    part: String,
    entry: String,
    line: usize,
    keys: Mapping,
}

/// Entries by what identifies them; several where lines add up.
type Items = BTreeMap<String, Vec<Item>>;

struct Side<'a> {
    network: &'a Network,
    /// The file as plain values: new keys of the layout are compared without being known here.
    root: Value,
}

impl<'a> Side<'a> {
    fn new(network: &'a Network) -> Self {
        // The text has been read before; were it not readable, nothing would be in it.
        let root = serde_yaml::from_str(&network.text).unwrap_or(Value::Null);
        Side { network, root }
    }

    /// A mapping of texts by name.
    fn named(&self, part: &str) -> Items {
        let all = self.root.get(part).and_then(Value::as_mapping);
        let item = |(key, value): (&Value, &Value)| {
            let name = text(Some(key));
            let item = Item {
                part: part.to_string(),
                entry: name.clone(),
                line: self.network.line(&format!("{part}.{name}")),
                keys: [(Value::from("text"), value.clone())].into_iter().collect(),
            };
            (name, vec![item])
        };
        all.into_iter().flatten().map(item).collect()
    }

    /// A list of mappings, told apart by the value of one key.
    fn listed(&self, part: &str, name: &str) -> Items {
        let mut items = Items::new();
        let list = self.root.get(part).and_then(Value::as_sequence);
        for (i, value) in list.into_iter().flatten().enumerate() {
            let item = self.item(part, value, name, &format!("{part}[{i}]"));
            items.entry(item.entry.clone()).or_default().push(item);
        }
        items
    }

    fn item(&self, part: &str, value: &Value, name: &str, place: &str) -> Item {
        let mut keys = value.as_mapping().cloned().unwrap_or_default();
        let entry = text(keys.remove(name).as_ref());
        Item {
            part: part.to_string(),
            entry,
            line: self.network.line(place),
            keys,
        }
    }

    /// All reactions, told apart by kind of cause, reactants and products.
    fn reactions(&self) -> Items {
        let mut items = Items::new();
        for entry in &self.network.entries {
            let part = entry.group.key();
            let value = self.root.get(part).and_then(|list| list.get(entry.index));
            let value = value.unwrap_or(&Value::Null);
            let item = self.item(part, value, "change", &format!("{part}[{}]", entry.index));
            let key = reaction_key(self.network, entry);
            items.entry(key).or_default().push(item);
        }
        items
    }

    /// The single settings of `dust`, and its neutralisation lines by ion and products.
    fn dust(&self) -> Items {
        let mut items = Items::new();
        let Some(dust) = self.root.get("dust").and_then(Value::as_mapping) else {
            return items;
        };
        let line = |place: &str| self.network.line(place);
        for (key, value) in dust {
            let name = text(Some(key));
            if name == "neutralisation" {
                continue;
            }
            let keys = match value {
                Value::Mapping(keys) => keys.clone(),
                value => [(Value::from("value"), value.clone())]
                    .into_iter()
                    .collect(),
            };
            let item = Item {
                part: "dust".to_string(),
                line: line(&format!("dust.{name}")),
                entry: name.clone(),
                keys,
            };
            items.entry(name).or_default().push(item);
        }
        let list = dust.get("neutralisation").and_then(Value::as_sequence);
        for (i, value) in list.into_iter().flatten().enumerate() {
            let place = format!("dust.neutralisation[{i}]");
            let mut item = self.item("dust", value, "ion", &place);
            let becomes = text(item.keys.remove("becomes").as_ref());
            item.entry = format!("{} -> {becomes} (on dust)", item.entry);
            let mut products: Vec<&str> = becomes.split('+').map(str::trim).collect();
            products.sort_unstable();
            let key = format!(
                "{} {}",
                item.entry.split(' ').next().unwrap_or(""),
                products.join(" + ")
            );
            items.entry(key).or_default().push(item);
        }
        items
    }
}

/// What makes two reaction lines the same reaction.
fn reaction_key(network: &Network, entry: &Entry) -> String {
    let kind = match entry.group {
        Group::Gas | Group::Capture | Group::Falloff | Group::ThreeBody => "encounters",
        Group::Cosmic if network.file.cosmic[entry.index].secondary.is_some() => "secondary",
        group => group.key(),
    };
    let side = |places: &[usize]| {
        let mut names: Vec<&str> = places
            .iter()
            .map(|place| network.roster.species[*place].name.as_str())
            .collect();
        names.sort_unstable();
        names.join(" + ")
    };
    format!(
        "{kind}: {} -> {}",
        side(&entry.reactants),
        side(&entry.products)
    )
}

/// Notes what only one side has, and what both have with other keys.
fn matched(sides: &[Items; 2], all: &mut Vec<Difference>) {
    let by_line = |found: &mut Vec<Difference>, side: usize| {
        found.sort_by_key(|difference| difference.lines[side]);
    };
    for side in 0..2 {
        let mut found = Vec::new();
        for (key, items) in &sides[side] {
            let matching = sides[1 - side].get(key).map_or(0, Vec::len);
            for item in items.iter().skip(matching) {
                let mut lines = [None, None];
                lines[side] = Some(item.line);
                found.push(difference(item, lines, Vec::new()));
            }
        }
        by_line(&mut found, side);
        all.append(&mut found);
    }
    let mut found = Vec::new();
    for (key, items) in &sides[0] {
        let others = sides[1].get(key).map_or(&[][..], Vec::as_slice);
        for (one, other) in items.iter().zip(others) {
            let keys = changes(one, other);
            if !keys.is_empty() {
                let lines = [Some(one.line), Some(other.line)];
                found.push(difference(one, lines, keys));
            }
        }
    }
    by_line(&mut found, 0);
    all.append(&mut found);
}

fn difference(item: &Item, lines: [Option<usize>; 2], keys: Vec<KeyChange>) -> Difference {
    Difference {
        part: item.part.clone(),
        entry: item.entry.clone(),
        lines,
        keys,
        ratio: None,
    }
}

/// The keys whose values differ, the group first.
fn changes(one: &Item, other: &Item) -> Vec<KeyChange> {
    let mut changes = Vec::new();
    if one.part != other.part {
        changes.push(KeyChange {
            key: "group".to_string(),
            values: [one.part.clone(), other.part.clone()],
        });
    }
    let names: BTreeSet<String> = (one.keys.keys())
        .chain(other.keys.keys())
        .map(|key| text(Some(key)))
        .collect();
    for key in names {
        let values = [one, other].map(|item| {
            let given = item.keys.get(key.as_str());
            given.map_or_else(|| usual(&key).to_string(), |v| text(Some(v)))
        });
        if values[0] != values[1] {
            changes.push(KeyChange { key, values });
        }
    }
    changes
}

/// What a key stands for where it is left out; `-` where that is nothing.
fn usual(key: &str) -> &'static str {
    match key {
        "slope" | "barrier" => "0.0",
        "below" => "extend",
        "adds" => "false",
        _ => "-",
    }
}

/// A value as text: numbers by their worth (`10` is `10.0`), lists and mappings in one line.
fn text(value: Option<&Value>) -> String {
    match value {
        None | Some(Value::Null) => "-".to_string(),
        Some(Value::Bool(value)) => value.to_string(),
        Some(Value::Number(number)) => match number.as_f64() {
            Some(value) => number_text(value),
            None => number.to_string(),
        },
        Some(Value::String(text)) => text.clone(),
        Some(Value::Sequence(list)) => {
            let items: Vec<String> = list.iter().map(|item| text(Some(item))).collect();
            format!("[{}]", items.join(", "))
        }
        Some(Value::Mapping(map)) => {
            let mut items: Vec<String> = map
                .iter()
                .map(|(key, value)| format!("{}: {}", text(Some(key)), text(Some(value))))
                .collect();
            items.sort_unstable();
            format!("{{{}}}", items.join(", "))
        }
        Some(Value::Tagged(tagged)) => text(Some(&tagged.value)),
    }
}

/// The other coefficient over the first, if both are two-body laws and any ratio is not 1.
fn ratio(sides: &[Side; 2], difference: &Difference) -> Option<[f64; 3]> {
    let lines = [difference.lines[0]?, difference.lines[1]?];
    let mut totals = [[0.0; 3]; 2];
    for (side, (line, totals)) in sides.iter().zip(lines.iter().zip(&mut totals)) {
        let network = side.network;
        let here = |entry: &&Entry| entry.line == *line;
        let entry = network.entries.iter().find(here)?;
        let key = reaction_key(network, entry);
        for same in &network.entries {
            if same.reactant_set() != entry.reactant_set() || reaction_key(network, same) != key {
                continue;
            }
            let law = collisions::coefficient(network, same)?;
            for (total, t) in totals.iter_mut().zip(COMPARED_AT) {
                *total += law(t);
            }
        }
    }
    let [one, other] = totals;
    let ratio: [f64; 3] = std::array::from_fn(|i| other[i] / one[i]);
    ratio
        .iter()
        .any(|r| (r - 1.0).abs() > 1e-9)
        .then_some(ratio)
}
