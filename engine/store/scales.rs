//! Owns the dimension scales: the HDF5 convention by which axes have names and values, which hdf5's
//! Rust interface does not offer.
//!
//! The only unsafe code of the store is here.

use std::ffi::CString;
use std::os::raw::{c_char, c_uint};

use hdf5::Dataset;
use hdf5_sys::h5::herr_t;
use hdf5_sys::h5i::hid_t;

// The high-level library libhdf5_hl, linked by hdf5-sys (feature `hl`), which does not declare these.
// SAFETY: names, argument and return types are those of H5DSpublic.h of HDF5 1.8 to 2.x.
unsafe extern "C" {
    fn H5DSset_scale(scale: hid_t, name: *const c_char) -> herr_t;
    fn H5DSattach_scale(dataset: hid_t, scale: hid_t, axis: c_uint) -> herr_t;
}

/// Makes `dataset` a dimension scale called `name`.
pub fn make_scale(dataset: &Dataset, name: &str) -> hdf5::Result<()> {
    let name = CString::new(name).map_err(|_| "the name of a scale holds a zero byte")?;
    // SAFETY: the identifier is of an open dataset that outlives the call, the name ends in a zero
    // byte and is copied by the callee, and `sync` keeps every other thread out of the library.
    let status = hdf5::sync::sync(|| unsafe { H5DSset_scale(dataset.id(), name.as_ptr()) });
    if status < 0 {
        Err("H5DSset_scale failed".into())
    } else {
        Ok(())
    }
}

/// Attaches `scale` to `axis` of `dataset`.
pub fn attach(dataset: &Dataset, scale: &Dataset, axis: usize) -> hdf5::Result<()> {
    let axis = c_uint::try_from(axis).map_err(|_| "more axes than HDF5 knows")?;
    // SAFETY: both identifiers are of open datasets that outlive the call, and `sync` keeps every
    // other thread out of the library.
    let status = hdf5::sync::sync(|| unsafe { H5DSattach_scale(dataset.id(), scale.id(), axis) });
    if status < 0 {
        Err("H5DSattach_scale failed".into())
    } else {
        Ok(())
    }
}
