//! Files made beside their place and renamed onto it, so that what stands there is always whole.
//!
//! Files are written into a hidden folder inside their destination, then each is renamed to its
//! place. The hidden folder holds a lock as long as its process lives: one that a killed process
//! left behind is removed by the next write. [`abandon`] removes those of this process before it
//! ends at an interrupt.

use std::fs::{self, File};
use std::io;
use std::path::{Path, PathBuf};
use std::sync::Mutex;
use std::sync::atomic::{AtomicU64, Ordering};

const PREFIX: &str = ".staging-";
const LOCK: &str = "lock";

/// Held while files are renamed, so that an interrupt waits for the last of them.
static RENAMING: Mutex<()> = Mutex::new(());
/// Hidden folders of this process.
static OPEN: Mutex<Vec<PathBuf>> = Mutex::new(Vec::new());
static NUMBER: AtomicU64 = AtomicU64::new(0);

/// A file that could not be written, and why.
pub type Fault = (PathBuf, io::Error);

/// Writes files into a folder, which is made if it is not there.
///
/// # Errors
/// The first [`Fault`]; files not yet renamed are as they were.
pub fn write_files(folder: &Path, files: &[(String, &[u8])]) -> Result<(), Fault> {
    let of_folder = |cause| (folder.to_owned(), cause);
    fs::create_dir_all(folder).map_err(of_folder)?;
    sweep(folder);
    let number = NUMBER.fetch_add(1, Ordering::Relaxed);
    let staging = folder.join(format!("{PREFIX}{}-{number}", std::process::id()));
    open().push(staging.clone());
    fs::create_dir(&staging).map_err(of_folder)?;
    let written = placed(folder, &staging, files);
    // Left-overs of a failed write are of no use to anybody; the first error is the one to tell.
    let removed = fs::remove_dir_all(&staging);
    open().retain(|path| *path != staging);
    written?;
    removed.map_err(|cause| (staging, cause))
}

fn placed(folder: &Path, staging: &Path, files: &[(String, &[u8])]) -> Result<(), Fault> {
    let lock = staging.join(LOCK);
    let held = File::create(&lock).and_then(|file| file.lock().map(|()| file));
    let _held = held.map_err(|cause| (lock, cause))?;
    for (name, bytes) in files {
        let path = staging.join(name);
        let sync = fs::write(&path, bytes).and_then(|()| File::open(&path)?.sync_all());
        sync.map_err(|cause| (path, cause))?;
    }
    let _renaming = RENAMING.lock();
    for (name, _) in files {
        let path = folder.join(name);
        fs::rename(staging.join(name), &path).map_err(|cause| (path, cause))?;
    }
    Ok(())
}

fn open() -> std::sync::MutexGuard<'static, Vec<PathBuf>> {
    OPEN.lock().unwrap_or_else(std::sync::PoisonError::into_inner)
}

/// Removes hidden folders whose process is gone.
fn sweep(folder: &Path) {
    for entry in fs::read_dir(folder).into_iter().flatten().flatten() {
        let name = entry.file_name();
        if !name.to_string_lossy().starts_with(PREFIX) || open().contains(&entry.path()) {
            continue;
        }
        let free = match File::open(entry.path().join(LOCK)) {
            Ok(file) => file.try_lock().is_ok(),
            Err(_) => true,
        };
        if free {
            // What cannot be removed is in nobody's way.
            let _ = fs::remove_dir_all(entry.path());
        }
    }
}

/// Waits for renames in progress, removes this process's hidden folders, and lets no further file
/// be renamed: to be called just before the process ends at an interrupt.
pub fn abandon() {
    core::mem::forget(RENAMING.lock());
    for staging in open().iter() {
        let _ = fs::remove_dir_all(staging);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn files_are_whole_and_left_overs_of_the_dead_are_removed() {
        let folder = std::env::temp_dir().join(format!("nightpool-staging-{}", std::process::id()));
        let left = folder.join(format!("{PREFIX}1-0"));
        fs::create_dir_all(&left).unwrap();
        fs::write(left.join(LOCK), "").unwrap();
        let held = folder.join(format!("{PREFIX}2-0"));
        fs::create_dir_all(&held).unwrap();
        let lock = File::create(held.join(LOCK)).unwrap();
        lock.lock().unwrap();
        write_files(&folder, &[("a.txt".into(), b"one"), ("b.txt".into(), b"two")]).unwrap();
        assert_eq!(fs::read(folder.join("b.txt")).unwrap(), b"two");
        assert!(!left.exists() && held.exists());
        drop(lock);
        write_files(&folder, &[]).unwrap();
        assert_eq!(fs::read_dir(&folder).unwrap().count(), 2);
        fs::remove_dir_all(&folder).unwrap();
    }
}
