//! A table for people: columns as wide as their widest cell, two blanks between.

use std::io::{self, Write};

/// Writes the rows; each has as many cells as the first.
pub(super) fn write_aligned<const N: usize>(
    out: &mut dyn Write,
    rows: &[[String; N]],
) -> io::Result<()> {
    let mut widths = [0; N];
    for row in rows {
        for (width, text) in widths.iter_mut().zip(row) {
            *width = (*width).max(text.chars().count());
        }
    }
    for row in rows {
        let mut text = String::new();
        for (width, cell) in widths.iter().zip(row) {
            text.push_str(cell);
            text.extend(std::iter::repeat_n(' ', width + 2 - cell.chars().count()));
        }
        writeln!(out, "{}", text.trim_end())?;
    }
    Ok(())
}
