//! Standard output as the commands see it.

use std::io::{self, ErrorKind, Write};

/// Standard output; a reader that went away (`| head`) has seen enough, and that is no failure.
pub(super) struct Output<'a> {
    inner: &'a mut dyn Write,
    has_reader: bool,
}

impl<'a> Output<'a> {
    /// Passes everything on.
    pub(super) fn to(inner: &'a mut dyn Write) -> Self {
        Self {
            inner,
            has_reader: true,
        }
    }

    /// Returns whether writing failed because nobody reads any more.
    pub(super) fn reader_is_gone(&self) -> bool {
        !self.has_reader
    }

    fn noticed<T>(&mut self, result: io::Result<T>) -> io::Result<T> {
        if let Err(error) = &result {
            self.has_reader &= error.kind() != ErrorKind::BrokenPipe;
        }
        result
    }
}

impl Write for Output<'_> {
    fn write(&mut self, bytes: &[u8]) -> io::Result<usize> {
        let result = self.inner.write(bytes);
        self.noticed(result)
    }

    fn flush(&mut self) -> io::Result<()> {
        let result = self.inner.flush();
        self.noticed(result)
    }
}
