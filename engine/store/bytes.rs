//! Owns the little-endian form of numbers, texts and lists in the journal.
//!
//! It never knows what is written and never reads a file. Floating-point numbers keep every bit:
//! NaN payloads and the sign of zero included.

use std::fmt;

/// Bytes that are not what their writer wrote.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Malformed {
    /// What was being read.
    pub reading: &'static str,
}

impl fmt::Display for Malformed {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "the bytes end or make no sense while reading {}",
            self.reading
        )
    }
}

/// Appends values to a buffer.
#[derive(Debug, Default)]
pub struct Encoder {
    bytes: Vec<u8>,
}

impl Encoder {
    pub fn byte(&mut self, value: u8) {
        self.bytes.push(value);
    }

    pub fn u32(&mut self, value: u32) {
        self.bytes.extend_from_slice(&value.to_le_bytes());
    }

    pub fn i32(&mut self, value: i32) {
        self.bytes.extend_from_slice(&value.to_le_bytes());
    }

    pub fn u64(&mut self, value: u64) {
        self.bytes.extend_from_slice(&value.to_le_bytes());
    }

    /// A number of things, or the index of one.
    pub fn count(&mut self, value: usize) {
        self.u64(value as u64);
    }

    pub fn f64(&mut self, value: f64) {
        self.bytes.extend_from_slice(&value.to_le_bytes());
    }

    pub fn text(&mut self, value: &str) {
        self.count(value.len());
        self.bytes.extend_from_slice(value.as_bytes());
    }

    pub fn f64s(&mut self, values: &[f64]) {
        self.count(values.len());
        self.bytes.reserve(8 * values.len());
        for value in values {
            self.f64(*value);
        }
    }

    pub fn texts(&mut self, values: &[String]) {
        self.count(values.len());
        for value in values {
            self.text(value);
        }
    }

    pub fn finish(self) -> Vec<u8> {
        self.bytes
    }
}

/// Takes values from the front of a buffer, in the order they were written.
#[derive(Debug)]
pub struct Decoder<'a> {
    rest: &'a [u8],
}

impl<'a> Decoder<'a> {
    pub fn new(bytes: &'a [u8]) -> Self {
        Decoder { rest: bytes }
    }

    fn take<const N: usize>(&mut self, reading: &'static str) -> Result<[u8; N], Malformed> {
        let (head, tail) = self
            .rest
            .split_first_chunk::<N>()
            .ok_or(Malformed { reading })?;
        self.rest = tail;
        Ok(*head)
    }

    pub fn byte(&mut self, reading: &'static str) -> Result<u8, Malformed> {
        Ok(self.take::<1>(reading)?[0])
    }

    pub fn u32(&mut self, reading: &'static str) -> Result<u32, Malformed> {
        Ok(u32::from_le_bytes(self.take(reading)?))
    }

    pub fn i32(&mut self, reading: &'static str) -> Result<i32, Malformed> {
        Ok(i32::from_le_bytes(self.take(reading)?))
    }

    pub fn u64(&mut self, reading: &'static str) -> Result<u64, Malformed> {
        Ok(u64::from_le_bytes(self.take(reading)?))
    }

    pub fn f64(&mut self, reading: &'static str) -> Result<f64, Malformed> {
        Ok(f64::from_le_bytes(self.take(reading)?))
    }

    /// An index.
    pub fn index(&mut self, reading: &'static str) -> Result<usize, Malformed> {
        usize::try_from(self.u64(reading)?).map_err(|_| Malformed { reading })
    }

    /// The length of a list whose entries take at least `each` bytes. A length that the rest of
    /// the buffer cannot hold is refused here, before anything is allocated for it.
    pub fn count(&mut self, each: usize, reading: &'static str) -> Result<usize, Malformed> {
        let count = self.index(reading)?;
        match count.checked_mul(each) {
            Some(needed) if needed <= self.rest.len() => Ok(count),
            _ => Err(Malformed { reading }),
        }
    }

    pub fn text(&mut self, reading: &'static str) -> Result<String, Malformed> {
        let length = self.count(1, reading)?;
        let (head, tail) = self.rest.split_at(length);
        self.rest = tail;
        String::from_utf8(head.to_vec()).map_err(|_| Malformed { reading })
    }

    pub fn f64s(&mut self, reading: &'static str) -> Result<Vec<f64>, Malformed> {
        let count = self.count(8, reading)?;
        (0..count).map(|_| self.f64(reading)).collect()
    }

    pub fn texts(&mut self, reading: &'static str) -> Result<Vec<String>, Malformed> {
        let count = self.count(8, reading)?;
        (0..count).map(|_| self.text(reading)).collect()
    }

    /// Everything must have been read: left-over bytes mean another layout.
    pub fn end(self, reading: &'static str) -> Result<(), Malformed> {
        if self.rest.is_empty() {
            Ok(())
        } else {
            Err(Malformed { reading })
        }
    }
}
