//! A place in one of the input files, in bytes. Lines and columns are worked out only when they are shown.

/// One input file among the [`Sources`](super::sources::Sources).
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub(crate) struct FileId(pub(crate) u32);

/// A stretch of an input file: `len` bytes from byte `start` of the decoded text.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub(crate) struct Span {
    /// The file.
    pub file: FileId,
    /// First byte, from 0.
    pub start: u32,
    /// Length in bytes.
    pub len: u32,
}

impl Span {
    /// The stretch of `file` from byte `start` up to, not including, byte `end`.
    #[must_use]
    pub(crate) fn new(file: FileId, start: usize, end: usize) -> Self {
        // The reader refuses input past 256 MiB, so the casts cannot lose anything.
        Self { file, start: start as u32, len: end.saturating_sub(start) as u32 }
    }

    /// One past the last byte.
    #[must_use]
    pub(crate) fn end(self) -> usize {
        self.start as usize + self.len as usize
    }
}
