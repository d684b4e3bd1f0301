//! `harklight new`: a commented starter design.

use std::io::{ErrorKind, Write};
use std::path::{Path, PathBuf};
use std::process::ExitCode;

use miette::miette;

use crate::whole_file::{Refusal, WholeFile};

const STARTER: &str = include_str!("../../configs/starter.toml");
const STARTER_TITLE: &str = "title = \"Starter link\"";

/// Write a commented starter design
#[derive(Debug, clap::Args)]
pub struct Args {
    /// Name of the design; NAME.toml is written
    name: PathBuf,
    /// Replace an existing file
    #[arg(long)]
    force: bool,
}

/// Writes NAME.toml and says so; the file appears whole or not at all.
///
/// # Errors
/// A name that is no file name, a file that exists (without `--force`), a folder that cannot be written.
pub fn run(args: &Args) -> Result<ExitCode, miette::Report> {
    let path = toml_path(&args.name)?;
    let title = path
        .file_stem()
        .unwrap_or_default()
        .to_string_lossy()
        .replace(['-', '_'], " ");
    let text = STARTER.replace(
        STARTER_TITLE,
        &format!("title = {}", toml::Value::String(title)),
    );
    let refused = |reason: &dyn std::fmt::Display| {
        miette!(
            help = "choose another name or folder",
            "cannot write {}: {reason}",
            path.display()
        )
    };
    let (whole, mut file) = WholeFile::create(&path).map_err(|why| match why {
        Refusal::Path(reason) => refused(&reason),
        Refusal::Machine(error) => refused(&error),
    })?;
    let written = file.write_all(text.as_bytes()).and_then(|()| {
        if args.force {
            whole.finish(file)
        } else {
            whole.finish_new(file)
        }
    });
    match written {
        Err(error) if error.kind() == ErrorKind::AlreadyExists => {
            return Err(miette!(
                help = "choose another name, or add --force to replace it",
                "{} exists",
                path.display()
            ));
        }
        other => other.map_err(|error| refused(&error))?,
    }
    let shown = path.display();
    super::parts::say(&format!(
        "{shown} written. Next: harklight render {shown} --input sent.wav --output received.wav\n"
    ))
}

/// NAME with its ending.
fn toml_path(name: &Path) -> Result<PathBuf, miette::Report> {
    if name.file_name().is_none() {
        return Err(miette!(
            help = "give a name such as my-link",
            "`{}` names no file",
            name.display()
        ));
    }
    if name.extension().is_some_and(|ending| ending == "toml") {
        return Ok(name.to_path_buf());
    }
    let mut whole = name.as_os_str().to_os_string();
    whole.push(".toml");
    Ok(PathBuf::from(whole))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::design::Design;

    fn args(name: &Path, force: bool) -> Args {
        Args {
            name: name.to_path_buf(),
            force,
        }
    }

    #[test]
    fn the_starter_is_a_whole_design_of_built_kinds() {
        let design = Design::from_text("starter.toml", STARTER, Path::new("."), &[]).unwrap();
        assert_eq!(design.title, "Starter link");
        assert_eq!(design.receiver_stages.len(), 3);
    }

    #[test]
    fn a_new_design_carries_its_name_and_never_replaces_a_file_unasked() {
        let folder = tempfile::tempdir().unwrap();
        let name = folder.path().join("garden-\"link\"");
        run(&args(&name, false)).unwrap();
        let path = folder.path().join("garden-\"link\".toml");
        let design = Design::load(&path, &[]).unwrap();
        assert_eq!(design.title, "garden \"link\"");
        std::fs::write(&path, "mine").unwrap();
        let error = run(&args(&path, false)).unwrap_err();
        assert!(error.to_string().ends_with("exists"), "{error}");
        assert_eq!(std::fs::read_to_string(&path).unwrap(), "mine");
        run(&args(&path, true)).unwrap();
        assert!(Design::load(&path, &[]).is_ok());
    }

    #[test]
    fn a_folder_that_is_not_there_is_told() {
        let error = run(&args(Path::new("no/such/folder/link"), false)).unwrap_err();
        assert!(error.to_string().contains("cannot write"), "{error}");
        assert!(run(&args(Path::new(".."), false)).is_err());
    }
}
