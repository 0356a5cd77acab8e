//! Owns the written form of a mapping file: what a person says about a rate table of theirs.
//!
//! It never looks at the table: `plan` finds the columns. Documented in networks/README.md.

use crate::network::layout::{Below, Standing};
use serde::de::value::MapAccessDeserializer;
use serde::de::{self, Deserialize, Deserializer, MapAccess, Visitor};
use std::collections::BTreeMap;
use std::fmt;
use std::marker::PhantomData;

/// A whole mapping file.
#[derive(Debug, Clone, serde::Deserialize)]
#[serde(deny_unknown_fields)]
pub struct MappingFile {
    /// Layout of the mapping itself: 1.
    pub mapping: u32,
    /// Name of the network that is made.
    pub network: String,
    #[serde(default)]
    pub about: String,
    pub table: TableForm,
    #[serde(default)]
    pub names: NameForm,
    pub change: ChangeForm,
    /// Column whose text says which law a row follows.
    pub label: Option<String>,
    /// Tried from top to bottom; the first that fits a row counts.
    pub laws: Vec<Rule>,
    pub valid: Option<RangeForm>,
    pub below: Option<Choice<Below>>,
    pub within: Option<Number>,
    pub standing: Choice<Standing>,
    /// Key of `sources`, or the column with references.
    pub source: Choice<String>,
    /// Citation by key, or by the text of the source column.
    #[serde(default)]
    pub sources: BTreeMap<String, String>,
    /// Columns whose text is kept as note.
    #[serde(default)]
    pub note: Vec<String>,
    /// Meaning of each spectrum that a law has rates for.
    #[serde(default)]
    pub spectra: BTreeMap<String, String>,
}

/// How the cells of a line are told apart.
#[derive(Debug, Clone, Copy, PartialEq, Eq, serde::Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Cells {
    /// By a delimiter.
    Delimited,
    /// By their place in the line.
    Fixed,
}

/// What the bytes of the table mean.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, serde::Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Encoding {
    #[default]
    Utf8,
    /// ISO 8859-1: every byte is one sign.
    Latin1,
}

/// The look of the table.
#[derive(Debug, Clone, serde::Deserialize)]
#[serde(deny_unknown_fields)]
pub struct TableForm {
    pub cells: Cells,
    /// One sign, `tab` or `spaces` (any run of blanks).
    pub delimiter: Option<String>,
    /// Sign around cells that hold the delimiter; doubled inside. None if left out.
    pub quote: Option<String>,
    /// Lines that start with it are passed over.
    pub comment: Option<String>,
    /// Lines at the top to pass over, whatever they hold.
    #[serde(default)]
    pub skip_lines: usize,
    /// Whether the first line names the columns.
    #[serde(default)]
    pub header: bool,
    /// Names of the columns of a delimited table without header.
    #[serde(default)]
    pub columns: Vec<String>,
    /// Fixed: first and last place of each column, from 1.
    #[serde(default)]
    pub places: BTreeMap<String, [usize; 2]>,
    /// Sign between whole numbers and decimals: `.` or `,`.
    pub decimal: Option<String>,
    #[serde(default)]
    pub encoding: Encoding,
}

/// From the table's names to ours. Applied in the order of the fields.
#[derive(Debug, Clone, Default, serde::Deserialize)]
#[serde(deny_unknown_fields)]
pub struct NameForm {
    /// Words that stand for an empty place.
    #[serde(default)]
    pub filler: Vec<String>,
    /// Words that stand where a species would, but are none: light, cosmic rays, a third body.
    #[serde(default)]
    pub markers: Vec<String>,
    /// Whole names.
    #[serde(default)]
    pub rename: BTreeMap<String, String>,
    pub ice_prefix: Option<String>,
    pub ice_suffix: Option<String>,
    /// Endings, such as those for a charge.
    #[serde(default)]
    pub endings: BTreeMap<String, String>,
    /// Pieces of formulas, such as elements in capitals.
    #[serde(default)]
    pub elements: BTreeMap<String, String>,
}

/// Where the two sides stand: an equation, or columns of their own.
#[derive(Debug, Clone, serde::Deserialize)]
#[serde(deny_unknown_fields)]
pub struct ChangeForm {
    /// Column with both sides.
    pub equation: Option<String>,
    /// Text between the sides of an equation.
    pub arrow: Option<String>,
    #[serde(default)]
    pub reactants: Vec<String>,
    #[serde(default)]
    pub products: Vec<String>,
    /// Text between species of one cell; `spaces` for any run of blanks.
    pub separator: Option<String>,
}

/// The range of temperatures of a row, K.
#[derive(Debug, Clone, serde::Deserialize)]
#[serde(deny_unknown_fields)]
pub struct RangeForm {
    pub low: Option<Number>,
    pub high: Option<Number>,
    /// Column with both, and the text between them.
    pub column: Option<String>,
    pub separator: Option<String>,
    /// Ends of two rows of one change that differ by no more (K) are made to meet.
    #[serde(default)]
    pub meet_within: f64,
}

/// Which law a row follows.
#[derive(Debug, Clone, Copy, PartialEq, Eq, serde::Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Law {
    PowerLaw,
    Capture,
    Falloff,
    ThreeBody,
    ThirdBody,
    Light,
    Direct,
    Secondary,
    /// Not wanted: the rows are listed with `reason`.
    LeaveOut,
}

/// One rule: which rows, which law, where its numbers stand.
#[derive(Debug, Clone, serde::Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Rule {
    /// Texts of the label column. Any text if left out.
    #[serde(default)]
    pub label: Vec<String>,
    /// A marker that must stand among the reactants.
    pub marker: Option<String>,
    pub law: Law,
    pub reason: Option<String>,
    // power_law, three_body, third_body
    #[serde(rename = "at_300K")]
    pub at_300k: Option<Number>,
    pub slope: Option<Number>,
    pub barrier: Option<Number>,
    /// T0 of a (T/T0)^b, K; 300 if left out.
    pub reference_temperature: Option<f64>,
    // capture: either of two pairs, times `share`
    pub langevin: Option<Number>,
    #[serde(rename = "x_300K")]
    pub x_300k: Option<Number>,
    pub polarisability: Option<Number>,
    pub dipole: Option<Number>,
    pub share: Option<Number>,
    // falloff
    pub low: Option<LimitForm>,
    pub high: Option<LimitForm>,
    pub centre: Option<Number>,
    // light
    pub rate: Option<Number>,
    pub extinction: Option<Number>,
    #[serde(default)]
    pub spectra: BTreeMap<String, Number>,
    // direct, secondary
    pub per_ionisation: Option<Number>,
    // all
    pub valid: Option<RangeForm>,
    pub below: Option<Choice<Below>>,
    /// Whether a second entry for the same change adds to the first.
    #[serde(default)]
    pub adds: bool,
}

/// One limit of a falloff coefficient.
#[derive(Debug, Clone, serde::Deserialize)]
#[serde(deny_unknown_fields)]
pub struct LimitForm {
    #[serde(rename = "at_300K")]
    pub at_300k: Number,
    pub slope: Option<Number>,
    pub barrier: Option<Number>,
}

/// How a number is written.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default, serde::Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum GivenAs {
    #[default]
    Value,
    /// Its decimal logarithm.
    Log10,
    /// What the factor exceeds 1 by, in percent.
    Percent,
}

/// A number of a row: the name of a column, a plain number for all rows, or the long form.
#[derive(Debug, Clone, Default, serde::Deserialize)]
#[serde(deny_unknown_fields)]
#[serde(remote = "Self")]
pub struct Number {
    pub column: Option<String>,
    pub value: Option<f64>,
    /// Unit of the column, where it is not that of our layout.
    pub unit: Option<String>,
    pub times: Option<f64>,
    pub over: Option<f64>,
    /// Columns that multiply, such as a branching.
    #[serde(default)]
    pub times_columns: Vec<String>,
    #[serde(default)]
    pub given_as: GivenAs,
    /// Numbers for words that stand in the column.
    #[serde(default)]
    pub words: BTreeMap<String, f64>,
    /// What an empty cell means.
    pub blank: Option<f64>,
}

impl<'de> Deserialize<'de> for Number {
    fn deserialize<D: Deserializer<'de>>(from: D) -> Result<Self, D::Error> {
        struct Forms;
        impl<'de> Visitor<'de> for Forms {
            type Value = Number;
            fn expecting(&self, f: &mut fmt::Formatter) -> fmt::Result {
                f.write_str("the name of a column, a number, or `{column: ...}`")
            }
            fn visit_str<E: de::Error>(self, column: &str) -> Result<Number, E> {
                let column = Some(column.to_string());
                Ok(Number {
                    column,
                    ..Number::default()
                })
            }
            fn visit_f64<E: de::Error>(self, value: f64) -> Result<Number, E> {
                let value = Some(value);
                Ok(Number {
                    value,
                    ..Number::default()
                })
            }
            fn visit_i64<E: de::Error>(self, value: i64) -> Result<Number, E> {
                self.visit_f64(value as f64)
            }
            fn visit_u64<E: de::Error>(self, value: u64) -> Result<Number, E> {
                self.visit_f64(value as f64)
            }
            fn visit_map<A: MapAccess<'de>>(self, map: A) -> Result<Number, A::Error> {
                Number::deserialize(MapAccessDeserializer::new(map))
            }
        }
        from.deserialize_any(Forms)
    }
}

/// One value for all rows, or a column whose words stand for values.
#[derive(Debug, Clone)]
pub enum Choice<T> {
    Always(T),
    Column(WordColumn<T>),
}

/// A column whose words stand for values.
#[derive(Debug, Clone, serde::Deserialize)]
#[serde(deny_unknown_fields, bound = "T: Deserialize<'de>")]
pub struct WordColumn<T> {
    pub column: String,
    #[serde(default = "BTreeMap::new")]
    pub words: BTreeMap<String, T>,
    /// What every other word and an empty cell mean.
    pub otherwise: Option<T>,
}

impl<'de, T: Deserialize<'de>> Deserialize<'de> for Choice<T> {
    fn deserialize<D: Deserializer<'de>>(from: D) -> Result<Self, D::Error> {
        struct Forms<T>(PhantomData<T>);
        impl<'de, T: Deserialize<'de>> Visitor<'de> for Forms<T> {
            type Value = Choice<T>;
            fn expecting(&self, f: &mut fmt::Formatter) -> fmt::Result {
                f.write_str("one word for all rows, or `{column: ...}`")
            }
            fn visit_str<E: de::Error>(self, word: &str) -> Result<Choice<T>, E> {
                T::deserialize(de::value::StrDeserializer::new(word)).map(Choice::Always)
            }
            fn visit_map<A: MapAccess<'de>>(self, map: A) -> Result<Choice<T>, A::Error> {
                WordColumn::deserialize(MapAccessDeserializer::new(map)).map(Choice::Column)
            }
        }
        from.deserialize_any(Forms(PhantomData))
    }
}
