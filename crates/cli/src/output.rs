//! Files and standard output. A file is written beside its target under another name and then renamed, so that nothing
//! half-written is left; several files of one command are all written before the first is renamed.

use std::io::{self, Read as _, Write as _};
use std::path::{Path, PathBuf};

use crate::failure::Failure;
use values::Diagnostic;

/// Reads a file, or standard input for `-`; returns its bytes and the name for messages.
///
/// # Errors
/// Wrong input: a file that can't be read.
pub fn read(path: &Path) -> Result<(Vec<u8>, String), Failure> {
    let name = if is_dash(path) { "standard input".to_owned() } else { path.display().to_string() };
    let bytes = if is_dash(path) {
        let mut bytes = Vec::new();
        io::stdin().lock().read_to_end(&mut bytes).map(|_| bytes)
    } else {
        std::fs::read(path)
    };
    bytes.map(|bytes| (bytes, name.clone())).map_err(|error| {
        let reason = reason(&error);
        Failure::option(Diagnostic::new(
            format!("{name} can't be read: {reason}"),
            "a file that exists and may be read",
            "check the name and the folder, and the right to read it",
        ))
    })
}

/// Whether a path stands for standard input or output.
pub fn is_dash(path: &Path) -> bool {
    path.as_os_str() == "-"
}

/// What the system says, without its error number.
fn reason(error: &io::Error) -> String {
    match error.kind() {
        io::ErrorKind::NotFound => "no such file or folder".to_owned(),
        io::ErrorKind::PermissionDenied => "permission denied".to_owned(),
        io::ErrorKind::IsADirectory => "it is a folder".to_owned(),
        io::ErrorKind::StorageFull => "the disk is full".to_owned(),
        _ => error.to_string(),
    }
}

/// Everything that a command leaves behind: files first, then standard output.
#[derive(Default)]
pub struct Outputs {
    files: Vec<(PathBuf, String)>,
    stdout: String,
}

impl Outputs {
    /// Adds a file; `-` is standard output.
    pub fn file(&mut self, path: &Path, text: String) {
        if is_dash(path) {
            self.stdout.push_str(&text);
        } else {
            self.files.push((path.to_owned(), text));
        }
    }

    /// Adds text for standard output.
    pub fn print(&mut self, text: &str) {
        self.stdout.push_str(text);
    }

    /// Writes the files, then standard output; a closed pipe is success.
    ///
    /// # Errors
    /// The disk failed: [`Failure::Program`], with nothing half-written left and nothing on standard output.
    pub fn write(self) -> Result<(), Failure> {
        let mut staged = Vec::new();
        for (path, text) in &self.files {
            staged.push(stage(path, text).map_err(|error| cannot_write(path, &error))?);
        }
        for (path, file) in self.files.iter().map(|(path, _)| path).zip(staged) {
            if let Some(file) = file {
                file.persist(path).map_err(|error| cannot_write(path, &error.error))?;
            }
        }
        let mut out = io::stdout().lock();
        match out.write_all(self.stdout.as_bytes()).and_then(|()| out.flush()) {
            Err(error) if error.kind() != io::ErrorKind::BrokenPipe => {
                Err(cannot_write(Path::new("standard output"), &error))
            }
            _ => Ok(()),
        }
    }

    /// The text meant for standard output, and the files; for a command that runs another one.
    pub fn into_parts(self) -> (Vec<(PathBuf, String)>, String) {
        (self.files, self.stdout)
    }
}

fn cannot_write(path: &Path, error: &io::Error) -> Failure {
    Failure::Program(format!("{} can't be written: {}", path.display(), reason(error)))
}

/// Writes the text beside its target. Devices and pipes can't be renamed over: they are written to at once (`None`).
fn stage(path: &Path, text: &str) -> io::Result<Option<tempfile::NamedTempFile>> {
    if std::fs::metadata(path).is_ok_and(|m| !m.is_file() && !m.is_dir()) {
        std::fs::OpenOptions::new().write(true).open(path)?.write_all(text.as_bytes())?;
        return Ok(None);
    }
    if path.is_dir() {
        return Err(io::ErrorKind::IsADirectory.into());
    }
    let folder = path.parent().filter(|p| !p.as_os_str().is_empty()).unwrap_or(Path::new("."));
    let mut builder = tempfile::Builder::new();
    builder.prefix(".latticewright-");
    #[cfg(unix)]
    {
        use std::os::unix::fs::PermissionsExt as _;
        // As any program creates a file: what the user's mask leaves of read and write for all.
        builder.permissions(std::fs::Permissions::from_mode(0o666));
    }
    let mut file = builder.tempfile_in(folder)?;
    file.write_all(text.as_bytes())?;
    file.as_file().sync_all()?;
    Ok(Some(file))
}

#[cfg(test)]
mod tests {
    use super::Outputs;

    #[test]
    fn when_one_file_cannot_be_written_no_other_is_touched() {
        let folder = tempfile::tempdir().unwrap();
        let good = folder.path().join("good.csv");
        std::fs::write(&good, "before").unwrap();
        let mut outputs = Outputs::default();
        outputs.file(&good, "after".to_owned());
        outputs.file(&folder.path().join("missing/bad.svg"), String::new());
        assert!(outputs.write().is_err());
        assert_eq!(std::fs::read_to_string(&good).unwrap(), "before");
        assert_eq!(std::fs::read_dir(folder.path()).unwrap().count(), 1, "nothing half-written is left");
    }
}
