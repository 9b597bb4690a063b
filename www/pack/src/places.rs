//! Where the parts of the workspace lie.

use anyhow::{Context, Result};
use std::env;
use std::path::{Path, PathBuf};

/// The folders the program works in; all absolute.
pub(crate) struct Places {
    /// The workspace.
    pub(crate) root: PathBuf,
    /// The page's sources.
    pub(crate) www: PathBuf,
    /// Cargo's target folder.
    pub(crate) target: PathBuf,
    /// Where the page goes.
    pub(crate) output: PathBuf,
}

impl Places {
    /// Finds them from what Cargo tells the programs it runs.
    pub(crate) fn find() -> Result<Self> {
        let package = env::var_os("CARGO_MANIFEST_DIR").context("start this program by `cargo page`")?;
        let root = Path::new(&package)
            .ancestors()
            .nth(2)
            .context("the pack program lies in www/pack of the workspace")?
            .to_owned();
        let target = match env::var_os("CARGO_TARGET_DIR") {
            Some(folder) => env::current_dir()?.join(folder),
            None => root.join("target"),
        };
        Ok(Self { www: root.join("www"), output: target.join("page"), root, target })
    }
}
