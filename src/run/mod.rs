//! Run folders: records, writing, reading, going on.

pub mod records;
