//! Files and standard output.

use super::error::CommandError;
use std::io::{self, Write};
use std::path::{Path, PathBuf};
use tempfile::{Builder, NamedTempFile};

/// A folder that files can be written into.
#[derive(Debug)]
pub(super) struct Folder {
    path: PathBuf,
}

impl Folder {
    /// Makes the folder if it is not there, and makes sure that files can be written, before anything is computed.
    ///
    /// `option` is the one that named the folder.
    pub(super) fn prepare(option: &'static str, path: &Path) -> Result<Self, CommandError> {
        let wrong = |source| CommandError::Output {
            option,
            path: path.to_owned(),
            source,
        };
        std::fs::create_dir_all(path).map_err(wrong)?;
        temporary(path).map_err(wrong)?;
        Ok(Self {
            path: path.to_owned(),
        })
    }

    /// Path of a file in the folder.
    pub(super) fn file(&self, name: &str) -> PathBuf {
        self.path.join(name)
    }

    /// Writes a file: under a temporary name first, so that nobody ever sees half of it.
    pub(super) fn write(&self, name: &str, content: &str) -> Result<PathBuf, CommandError> {
        let target = self.file(name);
        let written = || -> io::Result<()> {
            let mut file = temporary(&self.path)?;
            file.write_all(content.as_bytes())?;
            file.flush()?;
            file.persist(&target)?;
            Ok(())
        };
        written().map_err(|source| CommandError::Write {
            path: target.clone(),
            source,
        })?;
        Ok(target)
    }
}

/// A temporary file that, renamed, has the rights of an ordinary one.
fn temporary(folder: &Path) -> io::Result<NamedTempFile> {
    let mut builder = Builder::new();
    #[cfg(unix)]
    {
        use std::os::unix::fs::PermissionsExt;
        // Less what the user's mask takes away.
        builder.permissions(std::fs::Permissions::from_mode(0o666));
    }
    builder.prefix(".orbitsum").tempfile_in(folder)
}

/// Writes to standard output. A reader that has gone away (such as `head`) had what it wanted: that is success.
pub(super) fn print(content: &str) -> Result<(), CommandError> {
    let mut stdout = io::stdout().lock();
    match stdout
        .write_all(content.as_bytes())
        .and_then(|()| stdout.flush())
    {
        Err(error) if error.kind() != io::ErrorKind::BrokenPipe => {
            Err(CommandError::StandardOutput(error))
        }
        _ => Ok(()),
    }
}

/// Writes a line to standard error; nobody is left to tell if that fails.
pub(super) fn remark(line: &str) {
    let _ = writeln!(io::stderr().lock(), "{line}");
}
