//! `harklight new`: a commented starter design.

use std::io::Write;
use std::path::{Path, PathBuf};
use std::process::ExitCode;

use miette::miette;

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
    if path.is_dir() {
        return Err(miette!(
            help = "choose another name",
            "{} is a folder",
            path.display()
        ));
    }
    let title = path
        .file_stem()
        .unwrap_or_default()
        .to_string_lossy()
        .replace(['-', '_'], " ");
    let text = STARTER.replace(
        STARTER_TITLE,
        &format!("title = {}", toml::Value::String(title)),
    );
    let folder = path
        .parent()
        .filter(|folder| !folder.as_os_str().is_empty())
        .unwrap_or(Path::new("."));
    let failed = |error: &dyn std::fmt::Display| {
        miette!(
            help = "check that the folder exists and may be written",
            "cannot write {}: {error}",
            path.display()
        )
    };
    let mut file = beside(folder).map_err(|error| failed(&error))?;
    file.write_all(text.as_bytes())
        .and_then(|()| file.as_file().sync_all())
        .map_err(|error| failed(&error))?;
    let kept = if args.force {
        file.persist(&path)
    } else {
        file.persist_noclobber(&path)
    };
    if let Err(error) = kept {
        if error.error.kind() == std::io::ErrorKind::AlreadyExists {
            return Err(miette!(
                help = "choose another name, or add --force to replace it",
                "{} exists",
                path.display()
            ));
        }
        return Err(failed(&error.error));
    }
    let shown = path.display();
    super::parts::say(&format!(
        "{shown} written. Next: harklight render {shown} --input sent.wav --output received.wav\n"
    ))
}

/// A temporary file with the rights of an ordinary one.
fn beside(folder: &Path) -> std::io::Result<tempfile::NamedTempFile> {
    #[allow(unused_mut)]
    let mut builder = tempfile::Builder::new();
    #[cfg(unix)]
    {
        use std::os::unix::fs::PermissionsExt;
        builder.permissions(std::fs::Permissions::from_mode(0o666));
    }
    builder.tempfile_in(folder)
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
