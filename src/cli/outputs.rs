//! What a command writes besides audio, and the care that nothing it reads is overwritten. All of it is checked before the work
//! begins, so that no run is lost at its end.

use std::fs::File;
use std::io::{ErrorKind, Write};
use std::path::{Path, PathBuf};

use miette::miette;

use super::Failure;
use crate::whole_file::{Refusal, WholeFile, same_file, same_target};

/// The file for the JSON document, kept ready.
pub struct FiguresFile {
    path: PathBuf,
    whole: WholeFile,
    file: File,
}

impl FiguresFile {
    /// Makes ready for `path`.
    pub fn create(path: &Path) -> Result<Self, Failure> {
        if path.as_os_str() == "-" {
            return Err(miette!(
                help = "--json prints the document on standard output",
                "--figures takes the name of a file"
            )
            .into());
        }
        match WholeFile::create(path) {
            Ok((whole, file)) => Ok(Self {
                path: path.to_owned(),
                whole,
                file,
            }),
            Err(Refusal::Path(reason)) => Err(miette!(
                help = "give the path of a new file, or of a regular file to replace, in a folder that exists",
                "--figures {} cannot be written: {reason}",
                path.display()
            )
            .into()),
            Err(Refusal::Machine(e)) => Err(failed(path, &e)),
        }
    }

    /// Writes the document.
    pub fn finish(mut self, document: &str) -> Result<(), Failure> {
        self.file
            .write_all(document.as_bytes())
            .and_then(|()| self.whole.finish(self.file))
            .map_err(|e| failed(&self.path, &e))
    }
}

fn failed(path: &Path, why: &std::io::Error) -> Failure {
    Failure::Machine(miette!("{} could not be written: {why}", path.display()))
}

/// Refuses outputs that are inputs, or one another. Each stands beside what it is: `--output`, `the design file`.
pub fn refuse_overwriting(
    outputs: &[(&str, &Path)],
    inputs: &[(&str, &Path)],
) -> Result<(), Failure> {
    for (n, (option, output)) in outputs.iter().enumerate() {
        if let Some((what, _)) = inputs.iter().find(|(_, input)| same_file(input, output)) {
            return Err(miette!(
                help = "what is read is never overwritten: give another file name",
                "{option} {} is {what}",
                output.display()
            )
            .into());
        }
        let others = &outputs[..n];
        if let Some((other, _)) = others.iter().find(|(_, path)| same_target(path, output)) {
            return Err(miette!(
                help = "give each a file name of its own",
                "{option} {} is the file of {other} too",
                output.display()
            )
            .into());
        }
    }
    Ok(())
}

/// Prints to standard output; a reader that has gone is no fault.
pub fn print(text: &str) -> Result<(), Failure> {
    let mut out = std::io::stdout().lock();
    match out.write_all(text.as_bytes()).and_then(|()| out.flush()) {
        Err(e) if e.kind() != ErrorKind::BrokenPipe => Err(Failure::Machine(miette!(
            "standard output could not be written: {e}"
        ))),
        _ => Ok(()),
    }
}

/// Says something on standard error; where that has gone there is no one left to tell.
pub fn say(text: &str) {
    let _ = std::io::stderr().lock().write_all(text.as_bytes());
}
