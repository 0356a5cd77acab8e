//! Owns how one dataset with its unit, meaning and axes gets into an HDF5 file, and the memory of
//! what was put there, against which the reopened file is checked.
//!
//! It never decides what goes into a run file.

use hdf5::types::VarLenUnicode;
use hdf5::{Attribute, Dataset, File, Group, H5Type, Location};

use super::scales;

/// A dataset to come: name within its group, unit, meaning.
#[derive(Debug, Clone, Copy)]
pub struct Label<'a> {
    pub name: &'a str,
    /// Empty: none.
    pub units: &'a str,
    pub long_name: &'a str,
}

/// A number that datasets are made of.
pub trait Number: H5Type + Copy + PartialEq {
    /// Its bits, widened.
    fn bits(self) -> u64;
}

macro_rules! number {
    ($($kind:ty: $value:ident => $bits:expr;)*) => {
        $(impl Number for $kind {
            fn bits(self) -> u64 {
                let $value = self;
                $bits
            }
        })*
    };
}

number! {
    f64: value => value.to_bits();
    u64: value => value;
    u32: value => u64::from(value);
    i32: value => value as u64;
    i8: value => value as u64;
}

/// CRC-32 over the bits of some numbers.
pub fn fingerprint<T: Number>(values: &[T]) -> u32 {
    let mut hasher = crc32fast::Hasher::new();
    for value in values {
        hasher.update(&value.bits().to_le_bytes());
    }
    hasher.finalize()
}

fn text_fingerprint(values: &[VarLenUnicode]) -> u32 {
    let mut hasher = crc32fast::Hasher::new();
    for value in values {
        hasher.update(value.as_bytes());
        hasher.update(&[0]);
    }
    hasher.finalize()
}

/// How to read a dataset back for its fingerprint.
type Again = fn(&Dataset) -> hdf5::Result<u32>;

/// A dataset that the reopened file must hold.
#[derive(Debug)]
pub struct Kept {
    path: String,
    fingerprint: u32,
    again: Again,
}

impl Kept {
    /// Compares what `file` holds, bit for bit.
    pub fn check(&self, file: &File) -> hdf5::Result<()> {
        if (self.again)(&file.dataset(&self.path)?)? == self.fingerprint {
            Ok(())
        } else {
            Err(format!("{} does not hold what was written", self.path).into())
        }
    }
}

/// Puts datasets into a file and remembers their fingerprints.
pub struct Putter {
    pub file: File,
    kept: Vec<Kept>,
}

impl Putter {
    pub fn new(file: File) -> Self {
        Putter {
            file,
            kept: Vec::new(),
        }
    }

    /// The file, and what it must hold when reopened.
    pub fn finish(self) -> (File, Vec<Kept>) {
        (self.file, self.kept)
    }

    fn keep(&mut self, dataset: &Dataset, fingerprint: u32, again: Again) {
        self.kept.push(Kept {
            path: dataset.name(),
            fingerprint,
            again,
        });
    }

    /// A new group whose links keep their order.
    pub fn group(&self, name: &str) -> hdf5::Result<Group> {
        self.file
            .create_group_builder()
            .obj_track_times(false)
            .with_gcpl(|plist| {
                plist.link_creation_order(hdf5::plist::group_create::LinkCreationOrder::Indexed)
            })
            .create(name)
    }

    /// A dataset of numbers on the axes of `scales`.
    pub fn numbers<T: Number>(
        &mut self,
        group: &Group,
        label: Label,
        scales: &[&Dataset],
        values: &[T],
    ) -> hdf5::Result<Dataset> {
        let shape: Vec<usize> = scales.iter().map(|scale| scale.size()).collect();
        let dataset = group
            .new_dataset::<T>()
            .obj_track_times(false)
            .shape(shape)
            .create(label.name)?;
        dataset.write_raw(values)?;
        describe(&dataset, label, scales)?;
        self.keep(&dataset, fingerprint(values), numbers_again::<T>);
        Ok(dataset)
    }

    /// A dataset of texts: on one axis, or a single one.
    pub fn texts<S: AsRef<str>>(
        &mut self,
        group: &Group,
        label: Label,
        scale: Option<&Dataset>,
        values: &[S],
    ) -> hdf5::Result<Dataset> {
        let values: Vec<VarLenUnicode> = values.iter().map(|v| unicode(v.as_ref())).collect();
        let builder = group.new_dataset::<VarLenUnicode>().obj_track_times(false);
        let dataset = match scale {
            Some(scale) => builder.shape([scale.size()]).create(label.name)?,
            None => builder.shape(()).create(label.name)?,
        };
        dataset.write_raw(&values)?;
        describe(&dataset, label, scale.as_slice())?;
        self.keep(&dataset, text_fingerprint(&values), text_again);
        Ok(dataset)
    }

    /// A dimension scale of texts.
    pub fn text_scale<S: AsRef<str>>(
        &mut self,
        group: &Group,
        label: Label,
        values: &[S],
    ) -> hdf5::Result<Dataset> {
        let values: Vec<VarLenUnicode> = values.iter().map(|v| unicode(v.as_ref())).collect();
        let dataset = group
            .new_dataset::<VarLenUnicode>()
            .obj_track_times(false)
            .shape([values.len()])
            .create(label.name)?;
        dataset.write_raw(&values)?;
        self.keep(&dataset, text_fingerprint(&values), text_again);
        as_scale(dataset, label)
    }

    /// A dimension scale of numbers.
    pub fn number_scale<T: Number>(
        &mut self,
        group: &Group,
        label: Label,
        values: &[T],
    ) -> hdf5::Result<Dataset> {
        let dataset = group
            .new_dataset::<T>()
            .obj_track_times(false)
            .shape([values.len()])
            .create(label.name)?;
        dataset.write_raw(values)?;
        self.keep(&dataset, fingerprint(values), numbers_again::<T>);
        as_scale(dataset, label)
    }
}

fn numbers_again<T: Number>(dataset: &Dataset) -> hdf5::Result<u32> {
    Ok(fingerprint(&dataset.read_raw::<T>()?))
}

fn text_again(dataset: &Dataset) -> hdf5::Result<u32> {
    Ok(text_fingerprint(&dataset.read_raw::<VarLenUnicode>()?))
}

fn as_scale(dataset: Dataset, label: Label) -> hdf5::Result<Dataset> {
    scales::make_scale(&dataset, label.name)?;
    describe(&dataset, label, &[])?;
    Ok(dataset)
}

/// Unit, meaning and axes of a dataset.
pub fn describe(dataset: &Dataset, label: Label, scales: &[&Dataset]) -> hdf5::Result<()> {
    if !label.units.is_empty() {
        text_attribute(dataset, "units", label.units)?;
    }
    text_attribute(dataset, "long_name", label.long_name)?;
    for (axis, scale) in scales.iter().enumerate() {
        scales::attach(dataset, scale, axis)?;
    }
    Ok(())
}

/// Text of HDF5's: it ends at a zero byte, so one inside (only a panic's words could hold it) is
/// replaced by the sign for the unreadable.
fn unicode(text: &str) -> VarLenUnicode {
    let clean = text.replace('\0', "\u{fffd}");
    // Safe for any text without zero bytes, which `clean` is.
    clean.parse().unwrap_or_default()
}

pub fn text_attribute(at: &Location, name: &str, value: &str) -> hdf5::Result<Attribute> {
    let attribute = at.new_attr::<VarLenUnicode>().create(name)?;
    attribute.write_scalar(&unicode(value))?;
    Ok(attribute)
}

pub fn number_attribute<T: Number>(at: &Location, name: &str, value: T) -> hdf5::Result<()> {
    at.new_attr::<T>().create(name)?.write_scalar(&value)
}

/// An attribute of several numbers (or of one, as netCDF writes `_FillValue`).
pub fn list_attribute<T: Number>(at: &Location, name: &str, values: &[T]) -> hdf5::Result<()> {
    at.new_attr::<T>()
        .shape([values.len()])
        .create(name)?
        .write_raw(values)
}

/// Numbers that stand for words, in the way every netCDF reader knows.
pub fn flags(at: &Location, words: &[&str]) -> hdf5::Result<()> {
    let values: Vec<i8> = (0..words.len())
        .filter_map(|number| i8::try_from(number).ok())
        .collect();
    list_attribute(at, "flag_values", &values)?;
    text_attribute(at, "flag_meanings", &words.join(" "))?;
    Ok(())
}
