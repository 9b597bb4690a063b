//! Running other programs, with plain words where one is missing.

use anyhow::{Context, Result, bail};
use std::io::ErrorKind;
use std::path::Path;
use std::process::{Command, Stdio};

/// What to say where Node is missing.
const NODE_ADVICE: &str = "it comes with Node.js 18 or later; on Debian: apt-get install nodejs npm";
/// What to say where Rust's tools are missing.
const RUST_ADVICE: &str = "it comes with Rust (rustup)";

/// Runs the command to its end, its output shown as it comes; an error where it fails.
pub(crate) fn run(command: &mut Command) -> Result<()> {
    let status = command.status().map_err(|error| cannot_start(command, error))?;
    if !status.success() {
        bail!("{} ended with {status}", words(command));
    }
    Ok(())
}

/// Runs the command and returns what it printed, without the spaces around it.
pub(crate) fn read(command: &mut Command) -> Result<String> {
    let output = command.stderr(Stdio::inherit()).output().map_err(|error| cannot_start(command, error))?;
    if !output.status.success() {
        bail!("{} ended with {}", words(command), output.status);
    }
    let text = String::from_utf8(output.stdout)
        .with_context(|| format!("{} printed something that is no text", words(command)))?;
    Ok(text.trim().to_owned())
}

/// A program of an npm package, started in `www`.
pub(crate) fn node_program(www: &Path, name: &str) -> Command {
    let file = if cfg!(windows) { format!("{name}.cmd") } else { name.to_owned() };
    let mut command = Command::new(www.join("node_modules").join(".bin").join(file));
    command.current_dir(www);
    command
}

fn cannot_start(command: &Command, error: std::io::Error) -> anyhow::Error {
    let program = command.get_program().to_string_lossy().into_owned();
    if error.kind() != ErrorKind::NotFound {
        return anyhow::Error::new(error).context(format!("{program} does not start"));
    }
    let advice = match program.as_str() {
        "node" | "npm" | "npm.cmd" => NODE_ADVICE,
        "rustup" | "rustc" => RUST_ADVICE,
        _ => "delete www/node_modules and try again",
    };
    anyhow::anyhow!("{program} is missing: {advice}")
}

fn words(command: &Command) -> String {
    let mut words = vec![command.get_program().to_string_lossy()];
    words.extend(command.get_args().map(|argument| argument.to_string_lossy()));
    words.join(" ")
}
