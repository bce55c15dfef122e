//! Where a drawing's bytes come from: a file, memory, or either of them with pieces cut out and put in.
//!
//! A *spliced* source is a view: it keeps only the ranges and the inserted bytes, so that a drawing of any size can be
//! changed, scanned again and written without a copy of it in memory. Files are read, never mapped: a file that shrinks
//! while it is read gives an error here, where a map would end the process.

use std::fs::File;
use std::io::{self, Read, Seek, SeekFrom, Write};
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::SystemTime;

use sha2::{Digest, Sha256};

use crate::refusal::Refusal;

/// Bytes read at a time.
pub(crate) const CHUNK: usize = 256 << 10;

/// One change to a source: `remove` bytes at `at` make room for `insert`.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Edit {
    /// Byte offset in the source before any edit.
    pub at: u64,
    /// Number of bytes taken out there.
    pub remove: u64,
    /// Bytes put in their place.
    pub insert: Vec<u8>,
}

#[derive(Debug)]
enum Origin {
    File {
        file: File,
        path: PathBuf,
        /// Size and time of the last change when it was opened.
        seen: (u64, Option<SystemTime>),
    },
    Bytes(Vec<u8>),
}

/// One piece of a source, in order.
#[derive(Debug, Clone)]
pub(crate) enum Piece {
    /// Bytes of the origin.
    Kept {
        /// Offset in the origin.
        from: u64,
        /// Number of bytes.
        len: u64,
    },
    /// Bytes that the origin does not hold.
    Made(Arc<[u8]>),
}

impl Piece {
    fn len(&self) -> u64 {
        match self {
            Self::Kept { len, .. } => *len,
            Self::Made(bytes) => bytes.len() as u64,
        }
    }
}

/// The bytes of a drawing. Cheap to clone.
#[derive(Debug, Clone)]
pub struct Source {
    origin: Arc<Origin>,
    /// Where each piece begins in this source, and the piece.
    pieces: Arc<[(u64, Piece)]>,
    len: u64,
}

impl Source {
    /// A file on disk, opened once.
    ///
    /// # Errors
    /// When the file cannot be opened or is no regular file.
    pub fn open(path: &Path) -> Result<Self, Refusal> {
        let refuse = |error: io::Error| {
            Refusal::new(
                "read",
                format!("{} cannot be opened: {error}", path.display()),
                "Check the name and the permissions of the file",
            )
        };
        let file = File::open(path).map_err(refuse)?;
        let metadata = file.metadata().map_err(refuse)?;
        if !metadata.is_file() {
            return Err(Refusal::new(
                "read",
                format!("{} is not a regular file", path.display()),
                "Name a drawing file",
            ));
        }
        let seen = (metadata.len(), metadata.modified().ok());
        let origin = Origin::File { file, path: path.to_owned(), seen };
        Ok(Self::whole(origin, metadata.len()))
    }

    /// Looks whether the file behind this source is still as it was when it was opened.
    ///
    /// # Errors
    /// When its size or the time of its last change differs: another program writes to it.
    pub fn unchanged(&self) -> Result<(), Refusal> {
        let Origin::File { file, path, seen } = &*self.origin else {
            return Ok(());
        };
        let now = file.metadata().map_err(|error| self.unreadable(&error))?;
        if (now.len(), now.modified().ok()) == *seen {
            return Ok(());
        }
        Err(Refusal::new(
            "source-changed",
            format!("{} was changed by another program while it was read", path.display()),
            "Run again when the other program has finished",
        ))
    }

    /// Bytes in memory.
    pub fn from_bytes(bytes: impl Into<Vec<u8>>) -> Self {
        let bytes = bytes.into();
        let len = bytes.len() as u64;
        Self::whole(Origin::Bytes(bytes), len)
    }

    fn whole(origin: Origin, len: u64) -> Self {
        Self { origin: Arc::new(origin), pieces: Arc::from([(0, Piece::Kept { from: 0, len })]), len }
    }

    /// Number of bytes.
    pub fn len(&self) -> u64 {
        self.len
    }

    /// Whether there are no bytes at all.
    pub fn is_empty(&self) -> bool {
        self.len == 0
    }

    /// The file behind it, if there is one: for comparing devices and inodes.
    pub fn file(&self) -> Option<&File> {
        match &*self.origin {
            Origin::File { file, .. } => Some(file),
            Origin::Bytes(_) => None,
        }
    }

    /// The path of the file behind it, as it was named.
    pub fn path(&self) -> Option<&Path> {
        match &*self.origin {
            Origin::File { path, .. } => Some(path),
            Origin::Bytes(_) => None,
        }
    }

    /// Reads bytes at an offset; the number read is zero only at the end.
    ///
    /// # Errors
    /// Those of the file, and an unexpected end when it has shrunk since it was opened.
    pub fn read_at(&self, at: u64, buf: &mut [u8]) -> io::Result<usize> {
        if at >= self.len || buf.is_empty() {
            return Ok(0);
        }
        let index = self.pieces.partition_point(|(start, _)| *start <= at) - 1;
        let (start, piece) = &self.pieces[index];
        let inside = at - start;
        let left = usize::try_from(piece.len() - inside).unwrap_or(usize::MAX);
        let count = left.min(buf.len());
        let buf = &mut buf[..count];
        match piece {
            Piece::Made(bytes) => {
                let from = index_of(inside)?;
                buf.copy_from_slice(&bytes[from..from + count]);
                Ok(count)
            }
            Piece::Kept { from, .. } => match &*self.origin {
                Origin::Bytes(bytes) => {
                    let from = index_of(from + inside)?;
                    buf.copy_from_slice(&bytes[from..from + count]);
                    Ok(count)
                }
                Origin::File { file, .. } => match read_file_at(file, from + inside, buf)? {
                    0 => Err(io::Error::new(
                        io::ErrorKind::UnexpectedEof,
                        "the file has become shorter while it was read",
                    )),
                    count => Ok(count),
                },
            },
        }
    }

    /// The bytes of a range.
    ///
    /// # Errors
    /// As [`Source::read_at`], and when the range reaches past the end.
    pub fn range(&self, start: u64, end: u64) -> Result<Vec<u8>, Refusal> {
        let read = || -> io::Result<Vec<u8>> {
            let mut bytes = vec![0; index_of(end.saturating_sub(start))?];
            let mut done = 0;
            while done < bytes.len() {
                match self.read_at(start + done as u64, &mut bytes[done..])? {
                    0 => return Err(io::ErrorKind::UnexpectedEof.into()),
                    count => done += count,
                }
            }
            Ok(bytes)
        };
        read().map_err(|error| self.unreadable(&error))
    }

    /// Reads all bytes in order.
    pub fn reader(&self) -> Reader {
        Reader { source: self.clone(), at: 0 }
    }

    /// Lower-case hexadecimal SHA-256 of all bytes.
    ///
    /// # Errors
    /// When the file cannot be read.
    pub fn sha256(&self) -> Result<String, Refusal> {
        self.sha256_unless(&AtomicBool::new(false))
    }

    /// The same, given up with an error as soon as `stop` is set.
    pub(super) fn sha256_unless(&self, stop: &AtomicBool) -> Result<String, Refusal> {
        let mut hasher = Sha256::new();
        self.each_chunk(|chunk| {
            hasher.update(chunk);
            if stop.load(Ordering::Relaxed) { Err(io::ErrorKind::Interrupted.into()) } else { Ok(()) }
        })
        .map_err(|error| self.unreadable(&error))?;
        Ok(hex(&hasher.finalize()))
    }

    /// Writes all bytes; gives their number. Does not flush.
    ///
    /// # Errors
    /// Those of reading and of writing.
    pub fn write_to(&self, out: &mut (impl Write + ?Sized)) -> io::Result<u64> {
        self.each_chunk(|chunk| out.write_all(chunk))?;
        Ok(self.len)
    }

    /// Writes all bytes to a file from where it stands on; gives their number. What the file behind this source holds is
    /// copied inside of the system where it can do that.
    ///
    /// # Errors
    /// Those of reading and of writing.
    pub fn write_to_file(&self, out: &mut File) -> io::Result<u64> {
        let mut buf = Vec::new();
        for (start, piece) in self.pieces.iter() {
            let mut done = match (piece, &*self.origin) {
                (Piece::Kept { from, len }, Origin::File { file, .. }) => {
                    copy_inside(file, *from, *len, out)?
                }
                _ => 0,
            };
            while done < piece.len() {
                if buf.is_empty() {
                    buf = vec![0; CHUNK];
                }
                let most = index_of(piece.len() - done)?.min(buf.len());
                let count = self.read_at(start + done, &mut buf[..most])?;
                out.write_all(&buf[..count])?;
                done += count as u64;
            }
        }
        Ok(self.len)
    }

    /// Writes over what differs when `out` stands behind what [`Source::write_to_file`] has just written to it for
    /// `other`. False, with nothing written, when the two differ in more than the bytes put in.
    ///
    /// # Errors
    /// Those of writing.
    pub fn rewrite(&self, other: &Self, out: &mut File) -> io::Result<bool> {
        let alike = |((a, one), (b, two)): (&(u64, Piece), &(u64, Piece))| {
            a == b
                && match (one, two) {
                    (Piece::Made(one), Piece::Made(two)) => one.len() == two.len(),
                    (Piece::Kept { from: a, len: n }, Piece::Kept { from: b, len: m }) => a == b && n == m,
                    _ => false,
                }
        };
        let same = Arc::ptr_eq(&self.origin, &other.origin) && self.pieces.len() == other.pieces.len();
        if !same || !self.pieces.iter().zip(other.pieces.iter()).all(alike) {
            return Ok(false);
        }
        // The writing left the file at the end of what it wrote.
        let begin = out.stream_position()?.saturating_sub(self.len);
        for ((at, new), (_, old)) in self.pieces.iter().zip(other.pieces.iter()) {
            if let (Piece::Made(new), Piece::Made(old)) = (new, old)
                && new != old
            {
                out.seek(SeekFrom::Start(begin + at))?;
                out.write_all(new)?;
            }
        }
        out.seek(SeekFrom::Start(begin + self.len))?;
        Ok(true)
    }

    /// Whether another source holds the same bytes. Where both keep the same part of one file nothing is read.
    ///
    /// # Errors
    /// When a file cannot be read.
    pub fn same_as(&self, other: &Self) -> Result<bool, Refusal> {
        if self.len != other.len {
            return Ok(false);
        }
        let one_file = Arc::ptr_eq(&self.origin, &other.origin);
        let (mut mine, mut theirs) = (self.pieces.iter().peekable(), other.pieces.iter().peekable());
        let mut at = 0;
        while let (Some((start, piece)), Some((other_start, other_piece))) = (mine.peek(), theirs.peek()) {
            let (end, other_end) = (start + piece.len(), other_start + other_piece.len());
            let stop = end.min(other_end);
            let shared = match (piece, other_piece) {
                (Piece::Kept { from: a, .. }, Piece::Kept { from: b, .. }) if one_file => {
                    a + (at - start) == b + (at - other_start)
                }
                _ => false,
            };
            if !shared && !self.same_range(other, at, stop)? {
                return Ok(false);
            }
            at = stop;
            if end == stop {
                mine.next();
            }
            if other_end == stop {
                theirs.next();
            }
        }
        Ok(true)
    }

    fn same_range(&self, other: &Self, mut from: u64, to: u64) -> Result<bool, Refusal> {
        while from < to {
            let stop = to.min(from + CHUNK as u64);
            if self.range(from, stop)? != other.range(from, stop)? {
                return Ok(false);
            }
            from = stop;
        }
        Ok(true)
    }

    fn each_chunk(&self, mut take: impl FnMut(&[u8]) -> io::Result<()>) -> io::Result<()> {
        let mut buf = vec![0; CHUNK.min(index_of(self.len)?.max(1))];
        let mut at = 0;
        while at < self.len {
            let count = self.read_at(at, &mut buf)?;
            take(&buf[..count])?;
            at += count as u64;
        }
        Ok(())
    }

    /// A view of this source with the edits made.
    ///
    /// # Errors
    /// When the edits are not in order, overlap, or reach past the end.
    pub fn spliced(&self, edits: &[Edit]) -> Result<Self, Refusal> {
        let mut pieces = Vec::with_capacity(self.pieces.len() + 2 * edits.len());
        let mut done = 0;
        for edit in edits {
            let end = edit.at.checked_add(edit.remove);
            let Some(end) = end.filter(|end| edit.at >= done && *end <= self.len) else {
                return Err(Refusal::new(
                    "splice",
                    format!("a change at byte {} does not fit the drawing", edit.at),
                    "Read the drawing again, it may have changed",
                ));
            };
            self.cut(done, edit.at, &mut pieces);
            if !edit.insert.is_empty() {
                pieces.push(Piece::Made(Arc::from(edit.insert.as_slice())));
            }
            done = end;
        }
        self.cut(done, self.len, &mut pieces);
        let mut len = 0;
        let placed: Vec<(u64, Piece)> = pieces
            .into_iter()
            .map(|piece| {
                let start = len;
                len += piece.len();
                (start, piece)
            })
            .collect();
        Ok(Self { origin: Arc::clone(&self.origin), pieces: Arc::from(placed), len })
    }

    /// Appends the pieces that make up a range of this source.
    fn cut(&self, start: u64, end: u64, into: &mut Vec<Piece>) {
        for (at, piece) in self.pieces.iter() {
            let low = start.max(*at);
            let high = end.min(at + piece.len());
            if low >= high {
                continue;
            }
            into.push(match piece {
                Piece::Kept { from, .. } => Piece::Kept { from: from + (low - at), len: high - low },
                Piece::Made(bytes) => {
                    let whole = low == *at && high == at + piece.len();
                    let part = |x: u64| usize::try_from(x - at).unwrap_or(usize::MAX);
                    if whole {
                        Piece::Made(Arc::clone(bytes))
                    } else {
                        Piece::Made(Arc::from(&bytes[part(low)..part(high)]))
                    }
                }
            });
        }
    }

    /// The refusal for a file that cannot be read to its end.
    pub(crate) fn unreadable(&self, error: &io::Error) -> Refusal {
        let name = match self.path() {
            Some(path) => path.display().to_string(),
            None => "the drawing".to_owned(),
        };
        Refusal::new(
            "read",
            format!("{name} cannot be read: {error}"),
            "Check the disk or network drive, and that no other program is writing the file",
        )
    }
}

/// Reads a [`Source`] from its start to its end.
#[derive(Debug, Clone)]
pub struct Reader {
    source: Source,
    at: u64,
}

impl Read for Reader {
    fn read(&mut self, buf: &mut [u8]) -> io::Result<usize> {
        let count = self.source.read_at(self.at, buf)?;
        self.at += count as u64;
        Ok(count)
    }
}

fn index_of(at: u64) -> io::Result<usize> {
    usize::try_from(at).map_err(|_| io::ErrorKind::OutOfMemory.into())
}

#[cfg(unix)]
fn read_file_at(file: &File, at: u64, buf: &mut [u8]) -> io::Result<usize> {
    loop {
        match std::os::unix::fs::FileExt::read_at(file, buf, at) {
            Err(error) if error.kind() == io::ErrorKind::Interrupted => {}
            other => return other,
        }
    }
}

#[cfg(windows)]
fn read_file_at(file: &File, at: u64, buf: &mut [u8]) -> io::Result<usize> {
    std::os::windows::fs::FileExt::seek_read(file, buf, at)
}

/// Copies a range of a file behind what another holds, without the bytes passing through this program; gives how many
/// it could: none where the system or the file systems cannot.
#[cfg(any(target_os = "linux", target_os = "android"))]
fn copy_inside(from: &File, at: u64, len: u64, out: &File) -> io::Result<u64> {
    use rustix::io::Errno;
    // In steps, so that a signal does not have to wait for all of a large drawing.
    const STEP: u64 = 64 << 20;
    let mut offset = at;
    while offset - at < len {
        let left = usize::try_from((len - (offset - at)).min(STEP)).unwrap_or(CHUNK);
        match rustix::fs::copy_file_range(from, Some(&mut offset), out, None, left) {
            Ok(0) => break,
            Ok(_) | Err(Errno::INTR) => {}
            // Whatever the reason, reading and writing goes on from here and meets it again if it is a real one.
            Err(Errno::NOSPC) => return Err(Errno::NOSPC.into()),
            Err(_) => break,
        }
    }
    Ok(offset - at)
}

#[cfg(not(any(target_os = "linux", target_os = "android")))]
fn copy_inside(_: &File, _: u64, _: u64, _: &File) -> io::Result<u64> {
    Ok(0)
}

/// Lower-case hexadecimal digits.
pub(crate) fn hex(bytes: &[u8]) -> String {
    use std::fmt::Write;
    bytes.iter().fold(String::new(), |mut text, byte| {
        // Writing to a string cannot fail.
        let _ = write!(text, "{byte:02x}");
        text
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn edit(at: u64, remove: u64, insert: &str) -> Edit {
        Edit { at, remove, insert: insert.as_bytes().to_vec() }
    }

    fn all(source: &Source) -> String {
        let mut out = Vec::new();
        source.write_to(&mut out).unwrap();
        assert_eq!(out.len() as u64, source.len());
        let mut again = Vec::new();
        source.reader().read_to_end(&mut again).unwrap();
        assert_eq!(out, again);
        String::from_utf8(out).unwrap()
    }

    #[test]
    fn a_view_of_a_view_is_one_view() {
        let source = Source::from_bytes("0123456789");
        let once = source.spliced(&[edit(2, 3, "abc"), edit(5, 0, "X"), edit(10, 0, "end")]).unwrap();
        assert_eq!(all(&once), "01abcX56789end");
        let twice = once.spliced(&[edit(1, 2, "-"), edit(4, 2, "")]).unwrap();
        assert_eq!(all(&twice), "0-b56789end");
        assert_eq!(twice.range(2, 6).unwrap(), b"b567");
        assert_eq!(all(&source), "0123456789");
    }

    #[test]
    fn a_file_copies_and_is_written_over() {
        let bytes: Vec<u8> = (0..700_001u32).map(|i| i.to_le_bytes()[0]).collect();
        let mut file = tempfile::NamedTempFile::new().unwrap();
        file.write_all(&bytes).unwrap();
        for source in [Source::open(file.path()).unwrap(), Source::from_bytes(bytes.clone())] {
            let view = |word: &str| source.spliced(&[edit(3, 2, word), edit(600_000, 0, word)]).unwrap();
            let (first, second) = (view("abc"), view("xyz"));
            let mut out = tempfile::tempfile().unwrap();
            assert_eq!(first.write_to_file(&mut out).unwrap(), first.len());
            let held = |out: &mut File| {
                let mut held = Vec::new();
                out.rewind().unwrap();
                out.read_to_end(&mut held).unwrap();
                held
            };
            assert!(held(&mut out) == first.range(0, first.len()).unwrap());
            assert!(second.rewrite(&first, &mut out).unwrap());
            assert!(held(&mut out) == second.range(0, second.len()).unwrap());
            assert!(!view("longer").rewrite(&first, &mut out).unwrap());
            let elsewhere = source.spliced(&[edit(4, 2, "abc"), edit(600_000, 0, "abc")]).unwrap();
            assert!(!elsewhere.rewrite(&first, &mut out).unwrap());
            assert!(held(&mut out) == second.range(0, second.len()).unwrap());
        }
    }

    #[test]
    fn the_same_bytes_are_told_however_they_are_put_together() {
        let edit = |at, remove, insert: &str| Edit { at, remove, insert: insert.into() };
        let source = Source::from_bytes("0123456789".repeat(60_000));
        let copy = source.spliced(&[edit(7, 3, "789"), edit(300_000, 0, "abc")]).unwrap();
        let again = source.spliced(&[edit(300_000, 0, "ab")]).unwrap();
        assert!(!copy.same_as(&again).unwrap());
        let again = again.spliced(&[edit(300_002, 0, "c")]).unwrap();
        assert!(copy.same_as(&again).unwrap() && again.same_as(&copy).unwrap());
        let whole = Source::from_bytes(copy.range(0, copy.len()).unwrap());
        assert!(copy.same_as(&whole).unwrap() && whole.same_as(&copy).unwrap());
        let shifted = source.spliced(&[edit(0, 3, ""), edit(300_003, 0, "3ab3ab")]).unwrap();
        assert!(!copy.same_as(&shifted).unwrap() && copy.len() == shifted.len());
        assert!(Source::from_bytes("").same_as(&Source::from_bytes("")).unwrap());
    }

    #[test]
    fn bad_edits_are_refused() {
        let source = Source::from_bytes("0123456789");
        assert!(source.spliced(&[edit(11, 0, "x")]).is_err());
        assert!(source.spliced(&[edit(9, 2, "x")]).is_err());
        assert!(source.spliced(&[edit(3, 2, ""), edit(4, 0, "x")]).is_err());
        assert!(source.spliced(&[edit(u64::MAX, 2, "")]).is_err());
    }

    #[test]
    fn file_and_memory_give_the_published_hash() {
        // FIPS 180-2, appendix B.1.
        let abc = "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad";
        assert_eq!(Source::from_bytes("abc").sha256().unwrap(), abc);
        let mut file = tempfile::NamedTempFile::new().unwrap();
        file.write_all(b"abc").unwrap();
        let source = Source::open(file.path()).unwrap();
        assert_eq!(source.sha256().unwrap(), abc);
        file.as_file().set_len(1).unwrap();
        let error = source.sha256().unwrap_err();
        assert!(error.message.contains("shorter"), "{error}");
        assert!(Source::open(&std::env::temp_dir()).is_err());
    }
}
