//! The folder of the results: checked first, written beside, renamed at the end.
//!
//! [`OutputDirectory::prepare`] makes the folder and, inside it, the folder `.partial` for the files under way; it fails
//! before any work when nothing can be written there. [`OutputDirectory::commit`] moves the old files of the same names
//! aside, the new ones in, and puts the old ones back if any move fails. Without `commit` nothing remains of the run:
//! the files under way go, and so do folders that were made for them.
//!
//! **Another run.** `.partial` holds a lock while a run is under way; a second run into the same folder is refused. A
//! `.partial` without a lock is left from a run that was killed: old results that it had moved aside are put back, the
//! rest is removed.
//!
//! **Stale results.** A file of an earlier run that this run does not write again (trails of a run with trails, say) would
//! look current beside new layers. [`OutputDirectory::commit`] removes it when all of this holds: the earlier `run.json`
//! in the folder lists it among the files it wrote, its name is a plain name, and its bytes are still those of that run.
//! Any other file is left alone. Files that were edited by hand since are not lost either: a result that is about to be
//! replaced and whose bytes differ from what the earlier run wrote is kept beside as `edited-1-<name>` (or the next free
//! number).
//!
//! Files are not forced to the disk (`fsync`): after a power failure, run again.

use std::collections::BTreeMap;
use std::fs::{self, File};
use std::io::{self, BufWriter, Read, Write};
use std::path::{Path, PathBuf};

use serde::Deserialize;
use sha2::{Digest, Sha256};

/// Folder of the files under way, inside the folder of the results.
const PARTIAL: &str = ".partial";
/// Inside [`PARTIAL`]: the lock of the run under way.
const LOCK: &str = "lock";
/// Inside [`PARTIAL`]: old results moved aside by a commit under way.
const ASIDE: &str = "aside";
/// The run record, which lists what a run wrote.
pub const RUN_RECORD: &str = "run.json";
/// Inside [`PARTIAL`]: old results that have been replaced and only await removal.
const REPLACED: &str = "replaced";

/// Why results cannot be written. Nothing has changed in the folder then.
#[derive(Debug, thiserror::Error)]
pub enum OutputError {
    /// A file stands where the folder should be.
    #[error("{}: this is a file, expected a folder for the results; name another folder or move the file", .0.display())]
    NotADirectory(PathBuf),
    /// A folder stands where a result should be.
    #[error("{}: this is a folder, but a result of that name is to be written; move it or choose another --out", .0.display())]
    FolderInTheWay(PathBuf),
    /// An input would be replaced by a result.
    #[error("{}: this input would be replaced by a result of the same name; choose another --out", .0.display())]
    WouldReplaceInput(PathBuf),
    /// Another run is writing there.
    #[error("{}: another run is writing into this folder; wait for it or choose another --out", .0.display())]
    Busy(PathBuf),
    /// The disk or the quota is full.
    #[error("{}: the disk is full (or the quota used up); free space or choose another --out; earlier results are unchanged", .0.display())]
    DiskFull(PathBuf),
    /// Writing is not allowed.
    #[error("{}: not allowed to write there; choose a folder of your own with --out, or ask who owns it", .0.display())]
    NotAllowed(PathBuf),
    /// Anything else that the system reports.
    #[error("{}: {} failed: {source}; earlier results are unchanged", .path.display(), .doing)]
    Io {
        /// Where.
        path: PathBuf,
        /// What was tried.
        doing: &'static str,
        /// What the system said.
        source: io::Error,
    },
}

impl OutputError {
    /// A system error as the message the user needs.
    pub fn new(path: &Path, doing: &'static str, source: io::Error) -> Self {
        use io::ErrorKind::{FileTooLarge, PermissionDenied, QuotaExceeded, ReadOnlyFilesystem, StorageFull};
        let path = path.to_owned();
        match source.kind() {
            StorageFull | QuotaExceeded | FileTooLarge => OutputError::DiskFull(path),
            PermissionDenied | ReadOnlyFilesystem => OutputError::NotAllowed(path),
            _ => OutputError::Io { path, doing, source },
        }
    }
}

/// One result as the run record names it.
#[derive(Debug, Clone, PartialEq, Eq, serde::Serialize, Deserialize)]
pub struct WrittenFile {
    /// Its name in the folder.
    pub name: String,
    /// Its length, bytes.
    pub bytes: u64,
    /// SHA-256 of its bytes, lower-case hexadecimal.
    pub sha256: String,
}

/// What a commit did.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Committed {
    /// What was written.
    pub files: Vec<WrittenFile>,
    /// Results of an earlier run that this run did not write again, now removed.
    pub removed: Vec<String>,
    /// Copies kept of results that had been edited by hand.
    pub kept_edits: Vec<String>,
}

/// A folder of results under way.
#[derive(Debug)]
pub struct OutputDirectory {
    path: PathBuf,
    made: Vec<PathBuf>,
    inputs: Vec<PathBuf>,
    written: Vec<WrittenFile>,
    lock: Option<File>,
}

impl OutputDirectory {
    /// Makes the folder where it is missing and checks that files can be written into it. `inputs` are the files of the
    /// run, none of which a result may replace.
    ///
    /// # Errors
    /// When the folder cannot be used.
    pub fn prepare(path: &Path, inputs: &[&Path]) -> Result<Self, OutputError> {
        if path.exists() && !path.is_dir() {
            return Err(OutputError::NotADirectory(path.to_owned()));
        }
        let mut directory = OutputDirectory {
            path: path.to_owned(),
            made: Vec::new(),
            inputs: inputs.iter().filter_map(|p| p.canonicalize().ok()).collect(),
            written: Vec::new(),
            lock: None,
        };
        let partial = path.join(PARTIAL);
        directory.make(&partial)?;
        let lock_path = partial.join(LOCK);
        let lock = File::create(&lock_path).map_err(|e| OutputError::new(path, "making a file", e))?;
        match lock.try_lock() {
            Ok(()) => {}
            Err(fs::TryLockError::WouldBlock) => {
                directory.made.clear();
                return Err(OutputError::Busy(path.to_owned()));
            }
            // A file system without locks: runs into one folder at a time are then up to the user.
            Err(fs::TryLockError::Error(_)) => {}
        }
        directory.lock = Some(lock);
        directory.clear_leftovers().map_err(|e| OutputError::new(path, "removing files of a killed run", e))?;
        Ok(directory)
    }

    /// Makes a folder and those above it, remembering which were missing.
    fn make(&mut self, folder: &Path) -> Result<(), OutputError> {
        let missing: Vec<PathBuf> =
            folder.ancestors().take_while(|p| !p.as_os_str().is_empty() && !p.exists()).map(Path::to_owned).collect();
        for one in missing.into_iter().rev() {
            match fs::create_dir(&one) {
                Ok(()) => self.made.push(one),
                Err(e) if e.kind() == io::ErrorKind::AlreadyExists => {}
                Err(e) if e.kind() == io::ErrorKind::NotADirectory => {
                    return Err(OutputError::NotADirectory(one.parent().unwrap_or(&one).to_owned()));
                }
                Err(e) => return Err(OutputError::new(&one, "making the folder", e)),
            }
        }
        Ok(())
    }

    /// Puts back what a killed commit had moved aside and removes the rest.
    fn clear_leftovers(&self) -> io::Result<()> {
        let partial = self.path.join(PARTIAL);
        let aside = partial.join(ASIDE);
        if aside.is_dir() {
            for entry in fs::read_dir(&aside)? {
                let entry = entry?;
                fs::rename(entry.path(), self.path.join(entry.file_name()))?;
            }
            fs::remove_dir(&aside)?;
        }
        clear(&partial)
    }

    /// The folder.
    pub fn path(&self) -> &Path {
        &self.path
    }

    /// What has been written so far, in order.
    pub fn written(&self) -> &[WrittenFile] {
        &self.written
    }

    /// Checks that a result of this name may be written.
    fn check(&self, name: &str) -> Result<(), OutputError> {
        let target = self.path.join(name);
        if target.is_dir() {
            return Err(OutputError::FolderInTheWay(target));
        }
        if self.is_input(&target) {
            return Err(OutputError::WouldReplaceInput(target));
        }
        Ok(())
    }

    /// Checks names before the work that leads to them.
    ///
    /// # Errors
    /// When a folder or an input stands in the way of one.
    pub fn check_names<'n>(&self, names: impl IntoIterator<Item = &'n str>) -> Result<(), OutputError> {
        names.into_iter().try_for_each(|name| self.check(name))
    }

    /// Writes one result under way. `fill` gets a buffered writer; it is flushed, measured and hashed here.
    ///
    /// # Errors
    /// When it cannot be written; the folder is unchanged then.
    pub fn write(
        &mut self,
        name: &str,
        fill: impl FnOnce(&mut dyn Write) -> io::Result<()>,
    ) -> Result<WrittenFile, OutputError> {
        self.check(name)?;
        let path = self.path.join(PARTIAL).join(name);
        let failed = |e| OutputError::new(&self.path.join(name), "writing", e);
        let file = File::create(&path).map_err(failed)?;
        let mut out = BufWriter::with_capacity(1 << 16, Measured { out: file, bytes: 0, hash: Sha256::new() });
        fill(&mut out).and_then(|()| out.flush()).map_err(failed)?;
        let measured = out.into_inner().map_err(|e| failed(e.into_error()))?;
        let file = WrittenFile { name: name.to_owned(), bytes: measured.bytes, sha256: hex(measured.hash) };
        self.written.retain(|w| w.name != name);
        self.written.push(file.clone());
        Ok(file)
    }

    /// Takes up a result that a library writes to a path of its own (a database, say): `fill` gets that path.
    ///
    /// # Errors
    /// When it cannot be written; the folder is unchanged then.
    pub fn write_at<E>(
        &mut self,
        name: &str,
        fill: impl FnOnce(&Path) -> Result<(), E>,
    ) -> Result<Result<WrittenFile, E>, OutputError> {
        self.check(name)?;
        let path = self.path.join(PARTIAL).join(name);
        if let Err(e) = fill(&path) {
            return Ok(Err(e));
        }
        let (bytes, sha256) = digest(&path).map_err(|e| OutputError::new(&self.path.join(name), "reading back", e))?;
        let file = WrittenFile { name: name.to_owned(), bytes, sha256 };
        self.written.retain(|w| w.name != name);
        self.written.push(file.clone());
        Ok(Ok(file))
    }

    /// Puts the new results in place of the old ones and removes what is stale.
    ///
    /// # Errors
    /// When a file cannot be moved; the old results are then back in place.
    pub fn commit(mut self) -> Result<Committed, OutputError> {
        let files = std::mem::take(&mut self.written);
        self.check_names(files.iter().map(|w| w.name.as_str()))?;
        let mut swap = Swap::default();
        match self.swap(&files, &mut swap) {
            Ok(()) => {
                self.made.clear();
                // From here on the old results are never put back, whatever happens to the removal.
                let partial = self.path.join(PARTIAL);
                let _ = fs::rename(partial.join(ASIDE), partial.join(REPLACED));
                Ok(Committed { files, removed: swap.removed, kept_edits: swap.kept_edits })
            }
            Err((path, e)) => {
                swap.undo(&self.path);
                Err(OutputError::new(&path, "replacing", e))
            }
        }
    }

    fn swap(&self, files: &[WrittenFile], swap: &mut Swap) -> Result<(), (PathBuf, io::Error)> {
        let earlier = self.earlier();
        let partial = self.path.join(PARTIAL);
        let aside = partial.join(ASIDE);
        fs::create_dir(&aside).map_err(|e| (aside.clone(), e))?;
        for name in files.iter().map(|f| &f.name).filter(|name| self.path.join(name).exists()) {
            let old = self.path.join(name);
            if earlier.get(name).is_some_and(|sha256| !has_hash(&old, sha256)) {
                let copy = self.free_name(name);
                fs::copy(&old, self.path.join(&copy)).map_err(|e| (old.clone(), e))?;
                swap.kept_edits.push(copy);
            }
            swap.rename(&old, &aside.join(name)).map_err(|e| (old.clone(), e))?;
        }
        for (name, sha256) in earlier.iter().filter(|(name, _)| files.iter().all(|f| f.name != **name)) {
            let old = self.path.join(name);
            if !self.is_input(&old) && has_hash(&old, sha256) {
                swap.rename(&old, &aside.join(name)).map_err(|e| (old.clone(), e))?;
                swap.removed.push(name.clone());
            }
        }
        for file in files {
            let target = self.path.join(&file.name);
            swap.rename(&partial.join(&file.name), &target).map_err(|e| (target.clone(), e))?;
        }
        Ok(())
    }

    /// A name for the copy of an edited result.
    fn free_name(&self, name: &str) -> String {
        let names = (1_u64..).map(|n| format!("edited-{n}-{name}"));
        names.into_iter().find(|n| !self.path.join(n).exists()).expect("a folder has room for another name")
    }

    /// Names and hashes of what the earlier run wrote, by its run record; empty without one that can be read.
    fn earlier(&self) -> BTreeMap<String, String> {
        #[derive(Deserialize)]
        struct Record {
            files: Vec<WrittenFile>,
        }
        let text = fs::read(self.path.join(RUN_RECORD)).unwrap_or_default();
        let record: Record = serde_json::from_slice(&text).unwrap_or(Record { files: Vec::new() });
        let plain = |name: &str| Path::new(name).file_name().is_some_and(|n| n == name) && !name.starts_with('.');
        record.files.into_iter().filter(|f| plain(&f.name)).map(|f| (f.name, f.sha256)).collect()
    }

    fn is_input(&self, path: &Path) -> bool {
        path.canonicalize().is_ok_and(|p| self.inputs.contains(&p))
    }
}

fn has_hash(path: &Path, sha256: &str) -> bool {
    path.is_file() && digest(path).is_ok_and(|(_, now)| now == sha256)
}

impl Drop for OutputDirectory {
    /// Removes what is under way and folders made for it. Errors are left: there is nobody to tell, and the next run
    /// clears the rest.
    fn drop(&mut self) {
        if self.lock.is_some() {
            let partial = self.path.join(PARTIAL);
            let _ = clear(&partial);
            // Not when something is still aside: the next run puts it back.
            if fs::remove_dir(partial.join(ASIDE)).is_ok() || !partial.join(ASIDE).exists() {
                let _ = fs::remove_file(partial.join(LOCK));
                let _ = fs::remove_dir(&partial);
            }
        }
        for folder in self.made.iter().rev() {
            let _ = fs::remove_dir(folder);
        }
    }
}

/// Removes everything from [`PARTIAL`] but the lock and what is aside.
fn clear(partial: &Path) -> io::Result<()> {
    for entry in fs::read_dir(partial)? {
        let entry = entry?;
        match entry.file_name().to_str() {
            Some(LOCK | ASIDE) => {}
            _ if entry.file_type()?.is_dir() => fs::remove_dir_all(entry.path())?,
            _ => fs::remove_file(entry.path())?,
        }
    }
    Ok(())
}

/// What a commit has done so far.
#[derive(Debug, Default)]
struct Swap {
    renames: Vec<(PathBuf, PathBuf)>,
    removed: Vec<String>,
    kept_edits: Vec<String>,
}

impl Swap {
    fn rename(&mut self, from: &Path, to: &Path) -> io::Result<()> {
        fs::rename(from, to)?;
        self.renames.push((from.to_owned(), to.to_owned()));
        Ok(())
    }

    /// Takes it back in reverse. Best effort: what cannot be moved back stays aside, and the next run puts it back.
    fn undo(self, folder: &Path) {
        for (from, to) in self.renames.into_iter().rev() {
            let _ = fs::rename(to, from);
        }
        for copy in self.kept_edits {
            let _ = fs::remove_file(folder.join(copy));
        }
    }
}

/// A writer that counts and hashes.
#[derive(Debug)]
struct Measured<W> {
    out: W,
    bytes: u64,
    hash: Sha256,
}

impl<W: Write> Write for Measured<W> {
    fn write(&mut self, data: &[u8]) -> io::Result<usize> {
        let n = self.out.write(data)?;
        self.hash.update(&data[..n]);
        self.bytes += n as u64;
        Ok(n)
    }

    fn flush(&mut self) -> io::Result<()> {
        self.out.flush()
    }
}

/// Length and hash of a file.
fn digest(path: &Path) -> io::Result<(u64, String)> {
    let mut file = File::open(path)?;
    let mut measured = Measured { out: io::sink(), bytes: 0, hash: Sha256::new() };
    let mut buffer = vec![0; 1 << 16];
    loop {
        match file.read(&mut buffer)? {
            0 => return Ok((measured.bytes, hex(measured.hash))),
            n => measured.write_all(&buffer[..n])?,
        }
    }
}

fn hex(hash: Sha256) -> String {
    hash.finalize().iter().map(|byte| format!("{byte:02x}")).collect()
}
