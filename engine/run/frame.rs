//! Owns the frame around everything in a journal: `kind | length | crc32 | body`, the checksum over
//! kind, length and body, so that no damaged byte goes unnoticed.
//!
//! It never knows what a body means.

use std::io::{self, Read};

/// Bytes before the body of a frame.
pub(super) const FRAME: usize = 1 + 8 + 4;

/// Appends a frame.
pub(super) fn push_frame(out: &mut Vec<u8>, kind: u8, body: &[u8]) {
    let length = (body.len() as u64).to_le_bytes();
    out.push(kind);
    out.extend_from_slice(&length);
    out.extend_from_slice(&checksum(kind, length, body).to_le_bytes());
    out.extend_from_slice(body);
}

fn checksum(kind: u8, length: [u8; 8], body: &[u8]) -> u32 {
    let mut hasher = crc32fast::Hasher::new();
    hasher.update(&[kind]);
    hasher.update(&length);
    hasher.update(body);
    hasher.finalize()
}

/// The next frame, or None where there is no whole, intact one. `left` is what the file still
/// holds: a damaged length must not ask for more memory than that.
pub(super) fn read_frame(from: &mut impl Read, left: u64) -> io::Result<Option<(u8, Vec<u8>)>> {
    let mut head = [0; FRAME];
    if !fill(from, &mut head)? {
        return Ok(None);
    }
    let [kind, l0, l1, l2, l3, l4, l5, l6, l7, c0, c1, c2, c3] = head;
    let length = [l0, l1, l2, l3, l4, l5, l6, l7];
    let size = u64::from_le_bytes(length);
    if size > left.saturating_sub(FRAME as u64) {
        return Ok(None);
    }
    let mut body = Vec::new();
    // `take` grows the buffer with what is really there, whatever the length claims.
    from.take(size).read_to_end(&mut body)?;
    let whole = body.len() as u64 == size;
    let intact = whole && checksum(kind, length, &body) == u32::from_le_bytes([c0, c1, c2, c3]);
    Ok(intact.then_some((kind, body)))
}

/// Fills the buffer; false at the end of the file.
pub(super) fn fill(from: &mut impl Read, buffer: &mut [u8]) -> io::Result<bool> {
    match from.read_exact(buffer) {
        Ok(()) => Ok(true),
        Err(cause) if cause.kind() == io::ErrorKind::UnexpectedEof => Ok(false),
        Err(cause) => Err(cause),
    }
}
