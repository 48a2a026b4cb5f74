//! Files that appear whole or not at all: everything is written beside its place first, then renamed.
//!
//! The disk is not flushed: a power cut may lose a file, a failing program cannot halve one.

use super::{End, Stop};
use std::fs;
use std::io::{self, Write};
use std::path::{Path, PathBuf};
use tempfile::{NamedTempFile, PersistError};

/// A finished file: its name inside the output directory, and its bytes.
pub type Finished = (&'static str, Vec<u8>);

/// The output directory of a sheet: as asked for, or the sheet's name with `.out` beside it.
pub fn directory(sheet: &Path, asked: Option<&Path>) -> PathBuf {
    asked.map_or_else(|| sheet.with_extension("out"), Path::to_path_buf)
}

/// Writes all files into `directory`, making it if needed.
///
/// All bytes are written under temporary names before the first file gets its own name. On any error no temporary
/// file stays, nor a directory that this call made and left empty.
pub fn write_all(directory: &Path, files: &[Finished]) -> Result<(), Stop> {
    let made = missing_ancestor(directory);
    let result = fs::create_dir_all(directory)
        .map_err(|e| (directory.to_path_buf(), e))
        .and_then(|()| write_into(directory, files));
    result.map_err(|(path, error)| {
        if let Some(made) = made {
            remove_empty(directory, &made);
        }
        Stop::new(
            End::NotWritten,
            format!(
                "{} could not be written: {}; choose another place with --out",
                shown(&path),
                plain(&error)
            ),
        )
    })
}

fn write_into(directory: &Path, files: &[Finished]) -> Result<(), (PathBuf, io::Error)> {
    let mut waiting = vec![];
    for (name, bytes) in files {
        let path = directory.join(name);
        // A directory of that name would make the rename fail after other files have been renamed.
        if path.is_dir() {
            return Err((path, io::Error::other("a directory has that name")));
        }
        let file = temporary(directory, bytes).map_err(|e| (path.clone(), e))?;
        waiting.push((path, file));
    }
    for (path, file) in waiting {
        file.persist(&path).map_err(|PersistError { error, .. }| (path, error))?;
    }
    Ok(())
}

/// A temporary file in the same directory, with all bytes and the rights of an ordinary file.
fn temporary(directory: &Path, bytes: &[u8]) -> io::Result<NamedTempFile> {
    let mut file = NamedTempFile::new_in(directory)?;
    file.write_all(bytes)?;
    #[cfg(unix)]
    {
        use std::os::unix::fs::PermissionsExt;
        file.as_file().set_permissions(fs::Permissions::from_mode(0o644))?;
    }
    Ok(file)
}

/// The topmost directory that `create_dir_all` will have to make.
fn missing_ancestor(directory: &Path) -> Option<PathBuf> {
    directory
        .ancestors()
        .take_while(|a| !a.as_os_str().is_empty() && !a.exists())
        .last()
        .map(Path::to_path_buf)
}

/// Removes `directory` and what was made above it, as long as they are empty.
fn remove_empty(directory: &Path, made: &Path) {
    for level in directory.ancestors() {
        if fs::remove_dir(level).is_err() || level == made {
            break;
        }
    }
}

/// The system's reason without its number.
pub fn plain(error: &io::Error) -> String {
    let text = error.to_string();
    text.split(" (os error").next().unwrap_or_default().to_lowercase()
}

/// The name that messages use for a path.
pub fn shown(path: &Path) -> String {
    path.to_string_lossy().into_owned()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn names(directory: &Path) -> Vec<String> {
        let mut names: Vec<String> = fs::read_dir(directory)
            .unwrap()
            .map(|e| e.unwrap().file_name().to_string_lossy().into_owned())
            .collect();
        names.sort();
        names
    }

    #[test]
    fn files_appear_whole_readable_for_all_and_replace_older_ones() {
        let base = tempfile::tempdir().unwrap();
        let out = base.path().join("a/b.out");
        write_all(&out, &[("x.txt", b"old".to_vec())]).unwrap();
        write_all(&out, &[("x.txt", b"new".to_vec()), ("y.txt", b"y".to_vec())]).unwrap();
        assert_eq!(names(&out), ["x.txt", "y.txt"]);
        assert_eq!(fs::read(out.join("x.txt")).unwrap(), b"new");
        #[cfg(unix)]
        {
            use std::os::unix::fs::PermissionsExt;
            assert_eq!(
                fs::metadata(out.join("x.txt")).unwrap().permissions().mode() & 0o777,
                0o644
            );
        }
    }

    #[test]
    fn a_failure_leaves_nothing_behind() {
        let base = tempfile::tempdir().unwrap();
        let out = base.path().join("b.out");
        fs::create_dir_all(out.join("y.txt")).unwrap();
        let stop =
            write_all(&out, &[("x.txt", b"x".to_vec()), ("y.txt", b"y".to_vec())]).unwrap_err();
        assert_eq!(stop.end, End::NotWritten);
        assert!(
            stop.text.contains("y.txt could not be written: a directory has that name"),
            "{}",
            stop.text
        );
        assert_eq!(names(&out), ["y.txt"]);
    }

    #[test]
    fn a_directory_below_a_file_is_refused_and_not_half_made() {
        let base = tempfile::tempdir().unwrap();
        fs::write(base.path().join("file"), b"").unwrap();
        let stop = write_all(&base.path().join("file/b.out"), &[("x.txt", vec![])]).unwrap_err();
        assert_eq!(stop.end, End::NotWritten);
        assert_eq!(names(base.path()), ["file"]);
    }

    #[test]
    fn the_output_stands_beside_the_sheet_unless_asked_otherwise() {
        assert_eq!(directory(Path::new("a/choke.toml"), None), Path::new("a/choke.out"));
        assert_eq!(directory(Path::new("a/choke.toml"), Some(Path::new("b"))), Path::new("b"));
    }
}
