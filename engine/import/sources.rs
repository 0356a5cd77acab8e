//! Owns the citations of an import: a key for every text that stands in a source column.
//!
//! It never invents a citation: a text that nothing explains is its own.

use std::collections::{BTreeMap, HashMap};

/// Longest key made from a text.
const LONGEST_KEY: usize = 48;

/// Citations by key, and the keys of texts met so far.
#[derive(Debug, Clone)]
pub struct Sources {
    /// As given in the mapping: by key, or by the text of a cell.
    given: BTreeMap<String, String>,
    by_text: HashMap<String, String>,
    citations: BTreeMap<String, String>,
}

impl Sources {
    pub fn new(given: BTreeMap<String, String>) -> Self {
        let (by_text, citations) = (HashMap::new(), BTreeMap::new());
        Sources {
            given,
            by_text,
            citations,
        }
    }

    /// The citation of a key that was given out.
    pub fn citation(&self, key: &str) -> &str {
        self.citations.get(key).map_or("", String::as_str)
    }

    /// The key of an entry of the mapping's `sources`.
    pub fn key(&mut self, key: &str) -> String {
        self.cited(key)
    }

    /// The key for a text of the source column.
    pub fn cited(&mut self, text: &str) -> String {
        if let Some(key) = self.by_text.get(text) {
            return key.clone();
        }
        let citation = self
            .given
            .get(text)
            .cloned()
            .unwrap_or_else(|| text.to_string());
        let key = self.free(&readable(text));
        self.by_text.insert(text.to_string(), key.clone());
        self.citations.insert(key.clone(), citation);
        key
    }

    /// One key for what rests on several, as the pieces of one coefficient may.
    pub fn together(&mut self, keys: &[&str]) -> String {
        let mut different: Vec<&str> = Vec::new();
        for key in keys {
            if !different.contains(key) {
                different.push(key);
            }
        }
        if let [only] = different[..] {
            return only.to_string();
        }
        let text = different.join("+");
        let citation: Vec<&str> = different.iter().map(|key| self.citation(key)).collect();
        let citation = citation.join("; ");
        self.given.entry(text.clone()).or_insert(citation);
        self.cited(&text)
    }

    fn free(&self, key: &str) -> String {
        if !self.citations.contains_key(key) {
            return key.to_string();
        }
        let numbered = (2..).map(|n| format!("{key}-{n}"));
        numbered
            .into_iter()
            .find(|key| !self.citations.contains_key(key))
            .unwrap_or_default()
    }
}

/// A text as a key: letters, digits and a few signs.
fn readable(text: &str) -> String {
    let mut key = String::new();
    for sign in text.chars() {
        match sign {
            'A'..='Z' | 'a'..='z' | '0'..='9' | '.' | '+' | '_' => key.push(sign),
            _ if !key.ends_with('-') => key.push('-'),
            _ => {}
        }
    }
    let key = key.trim_matches('-');
    let key = &key[..key.len().min(LONGEST_KEY)];
    let key = key.trim_end_matches('-');
    if key.is_empty() {
        "source".to_string()
    } else {
        key.to_string()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    // Two references under one key would credit the wrong people.
    #[test]
    fn every_text_has_a_key_of_its_own() {
        let given = BTreeMap::from([("12".to_string(), "Doe 2001".to_string())]);
        let mut sources = Sources::new(given);
        let keys =
            ["12", "A. Doe, 1", "A Doe (1)", "A. Doe, 1", "é"].map(|text| sources.cited(text));
        assert_eq!(keys, ["12", "A.-Doe-1", "A-Doe-1", "A.-Doe-1", "source"]);
        assert_eq!(sources.cited("A-Doe-1"), "A-Doe-1-2");
        assert_eq!(sources.citation("12"), "Doe 2001");
        assert_eq!(sources.citation("A-Doe-1"), "A Doe (1)");
        let both = sources.together(&["12", "A-Doe-1", "12"]);
        assert_eq!(sources.citation(&both), "Doe 2001; A Doe (1)");
        assert_eq!(sources.together(&["12", "12"]), "12");
    }
}
