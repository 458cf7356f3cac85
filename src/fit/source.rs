//! Where a table's bytes come from: behind a byte-order mark, and no more of them for a row than a row may have.

use std::cell::Cell;
use std::fs::File;
use std::io::{Cursor, Error, Read, Result};
use std::rc::Rc;

/// Longest row with the comments before it, bytes.
pub const LONGEST_ROW: usize = 1 << 20;

/// A reader that gives out no more than its ration, so that a row without an end is told instead of gathered.
pub struct Rationed {
    inner: Box<dyn Read>,
    left: Rc<Cell<usize>>,
}

impl Read for Rationed {
    fn read(&mut self, buffer: &mut [u8]) -> Result<usize> {
        if self.left.get() == 0 {
            return Err(Error::other(format!(
                "a row with the comments before it is longer than {LONGEST_ROW} bytes"
            )));
        }
        let most = buffer.len().min(self.left.get());
        let count = self.inner.read(&mut buffer[..most])?;
        self.left.set(self.left.get() - count);
        Ok(count)
    }
}

/// The file behind its mark, and its ration to be filled up for every row.
pub fn rationed(mut file: File) -> Result<(Rationed, Rc<Cell<usize>>)> {
    let mut first = Vec::new();
    (&mut file).take(3).read_to_end(&mut first)?;
    if first == b"\xef\xbb\xbf" {
        first.clear();
    }
    let left = Rc::new(Cell::new(LONGEST_ROW));
    let reader = Rationed {
        inner: Box::new(Cursor::new(first).chain(file)),
        left: left.clone(),
    };
    Ok((reader, left))
}
