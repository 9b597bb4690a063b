//! The TypeScript: packages from the lock file, strict check, one script for the page, one that unpacks it, one for the worker.

use crate::places::Places;
use crate::run::{node_program, read, run};
use anyhow::Result;
use std::fs;
use std::process::Command;
use std::time::SystemTime;

/// The browsers the scripts are written for; DESIGN.md calls them the baseline.
const BROWSERS: &str = "--target=chrome109,firefox115,safari16.4";

/// The bundled scripts.
pub(crate) struct Scripts {
    /// Runs in the page.
    pub(crate) page: String,
    /// Unpacks and runs the former.
    pub(crate) start: String,
    /// Runs in the worker.
    pub(crate) worker: String,
}

/// Installs the packages of the lock file where they are missing or older than it.
pub(crate) fn install(places: &Places) -> Result<()> {
    // Said here in plain words, since the packages' own programs would say it in theirs.
    read(Command::new("node").arg("--version"))?;
    let time = |path: &str| -> Option<SystemTime> { fs::metadata(places.www.join(path)).ok()?.modified().ok() };
    let installed = time("node_modules/.package-lock.json");
    if installed.is_some() && installed >= time("package-lock.json") {
        return Ok(());
    }
    let npm = if cfg!(windows) { "npm.cmd" } else { "npm" };
    run(Command::new(npm).current_dir(&places.www).args(["ci", "--no-audit", "--no-fund"]))
}

/// Checks the types and bundles both scripts.
pub(crate) fn build(places: &Places) -> Result<Scripts> {
    run(node_program(&places.www, "tsc").arg("--noEmit"))?;
    Ok(Scripts {
        page: bundle(places, "main.ts")?,
        start: bundle(places, "start.ts")?,
        worker: bundle(places, "worker.ts")?,
    })
}

fn bundle(places: &Places, entry: &str) -> Result<String> {
    read(
        node_program(&places.www, "esbuild")
            .arg(format!("src/{entry}"))
            .args(["--bundle", "--minify", "--format=iife", "--charset=utf8", "--log-level=warning"])
            .args(["--legal-comments=none", BROWSERS]),
    )
}
