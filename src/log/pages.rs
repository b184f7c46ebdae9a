//! Rows of tables, read from the pages of a database file without the engine and without the tree that leads to them.
//!
//! A leaf page of a table holds, big-endian throughout:
//! ```text
//! 13, 2 bytes, number of cells (2), 3 bytes, then the place of each cell in the page (2); on the first page all this stands at byte 100
//! cell:     length of the record, number of the row, record; the end of a long record is in a chain of other pages
//! record:   length of its head, the kinds of its columns, the columns
//! kind:     0 empty; 1 to 6 integers of 1, 2, 3, 4, 6, 8 bytes; 7 a float; 8 and 9 the integers 0 and 1; from 13 on, odd: text
//! ```
//! where a length, a number and a kind is of one to nine bytes, seven bits each, the last one eight. Nothing here is believed: what
//! does not fit ends the cell, and the check sums of the rows decide.

use rusqlite::types::Value;

/// The size of a page where the head of the file does not tell.
const USUAL_SIZE: usize = 4096;

/// A file in memory.
#[derive(Clone, Copy, Debug)]
pub(super) struct Pages<'a> {
    bytes: &'a [u8],
    size: usize,
}

impl<'a> Pages<'a> {
    pub(super) fn new(bytes: &'a [u8]) -> Self {
        let told = match whole(bytes, 16, 2) {
            Some(1) => 65_536,
            Some(told) => told,
            None => 0,
        };
        let fits = told.is_power_of_two() && told >= 512;
        Self {
            bytes,
            size: if fits { told } else { USUAL_SIZE },
        }
    }

    /// Calls back with number and columns of each row in each leaf page, in the order of the file.
    pub(super) fn rows(self, mut found: impl FnMut(i64, Vec<Value>)) {
        for (index, page) in self.bytes.chunks(self.size).enumerate() {
            let head = if index == 0 { 100 } else { 0 };
            if page.get(head) != Some(&13) {
                continue;
            }
            for cell in 0..whole(page, head + 3, 2).unwrap_or(0) {
                if let Some((id, values)) =
                    whole(page, head + 8 + 2 * cell, 2).and_then(|at| self.row(page, at))
                {
                    found(id, values);
                }
            }
        }
    }

    fn row(self, page: &[u8], at: usize) -> Option<(i64, Vec<Value>)> {
        let mut cell = page.get(at..)?;
        let length = usize::try_from(varint(&mut cell)?)
            .ok()
            .filter(|length| *length <= self.bytes.len())?;
        let id = varint(&mut cell)?;
        let most = self.size - 35;
        if length <= most {
            return Some((id, columns(cell.get(..length)?)?));
        }
        let least = (self.size - 12) * 32 / 255 - 23;
        let fitting = least + (length - least) % (self.size - 4);
        let here = if fitting <= most { fitting } else { least };
        let mut record = cell.get(..here)?.to_vec();
        let mut next = whole(cell, here, 4)?;
        while record.len() < length {
            let start = next.checked_sub(1)?.checked_mul(self.size)?;
            let part = (length - record.len()).min(self.size - 4);
            next = whole(self.bytes, start, 4)?;
            record.extend_from_slice(self.bytes.get(start + 4..start + 4 + part)?);
        }
        Some((id, columns(&record)?))
    }
}

fn columns(record: &[u8]) -> Option<Vec<Value>> {
    let mut rest = record;
    let head = usize::try_from(varint(&mut rest)?).ok()?;
    let mut kinds = record.get(record.len() - rest.len()..head)?;
    let mut body = record.get(head..)?;
    let mut values = Vec::new();
    while !kinds.is_empty() {
        let kind = varint(&mut kinds)?;
        let length = match kind {
            0 | 8 | 9 => 0,
            1..=4 => usize::try_from(kind).ok()?,
            5 => 6,
            6 | 7 => 8,
            13.. if kind % 2 == 1 => usize::try_from((kind - 13) / 2).ok()?,
            _ => return None,
        };
        let (cell, rest) = body.split_at_checked(length)?;
        body = rest;
        values.push(match kind {
            0 => Value::Null,
            1..=6 => Value::Integer(integer(cell)),
            7 => Value::Real(f64::from_be_bytes(cell.try_into().ok()?)),
            8 => Value::Integer(0),
            9 => Value::Integer(1),
            _ => Value::Text(String::from_utf8(cell.to_vec()).ok()?),
        });
    }
    Some(values)
}

fn integer(bytes: &[u8]) -> i64 {
    let sign = if bytes.first().is_some_and(|first| *first >= 0x80) {
        -1
    } else {
        0
    };
    bytes
        .iter()
        .fold(sign, |number, byte| number << 8 | i64::from(*byte))
}

fn whole(bytes: &[u8], at: usize, length: usize) -> Option<usize> {
    let bytes = bytes.get(at..at.checked_add(length)?)?;
    Some(
        bytes
            .iter()
            .fold(0, |number, byte| number << 8 | usize::from(*byte)),
    )
}

fn varint(bytes: &mut &[u8]) -> Option<i64> {
    let mut number = 0;
    for index in 0..9 {
        let (byte, rest) = bytes.split_first()?;
        *bytes = rest;
        if index == 8 {
            return Some(number << 8 | i64::from(*byte));
        }
        number = number << 7 | i64::from(byte & 0x7f);
        if *byte < 0x80 {
            break;
        }
    }
    Some(number)
}
