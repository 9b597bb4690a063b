//! Builds the page: one HTML file with the program, its worker and its WebAssembly inside.
//!
//! `cargo page` builds `target/page/stayband.html`; `cargo page --check-types` only checks that the committed
//! `www/src/types.ts` is what the core's types say. The same sources give the same bytes, wherever they lie.
//!
//! The steps, one file each: [`types`] writes the TypeScript types of project, record and answer; [`engine`] compiles
//! the `wasm` crate and makes its JavaScript glue; [`bundle`] checks and bundles the TypeScript; [`page`] puts the
//! parts into `www/index.html`.

mod bundle;
mod engine;
mod page;
mod places;
mod printable;
mod run;
mod types;

use anyhow::{Result, bail};
use places::Places;
use sha2::{Digest, Sha256};
use std::fs;
use std::process::ExitCode;

/// What the program was asked to do.
enum Task {
    Build,
    CheckTypes,
}

fn main() -> ExitCode {
    match read_task().and_then(|task| work(&task)) {
        Ok(()) => ExitCode::SUCCESS,
        Err(error) => {
            eprintln!("cargo page: {error:#}");
            ExitCode::FAILURE
        }
    }
}

fn read_task() -> Result<Task> {
    let arguments: Vec<String> = std::env::args().skip(1).collect();
    match arguments.iter().map(String::as_str).collect::<Vec<_>>().as_slice() {
        [] => Ok(Task::Build),
        ["--check-types"] => Ok(Task::CheckTypes),
        other => {
            bail!("unknown arguments {other:?}; type `cargo page` or `cargo page --check-types`")
        }
    }
}

fn work(task: &Task) -> Result<()> {
    let places = Places::find()?;
    match task {
        Task::CheckTypes => types::check(&places),
        Task::Build => build(&places),
    }
}

fn build(places: &Places) -> Result<()> {
    types::write(places)?;
    bundle::install(places)?;
    let wasm = engine::build(places)?;
    let scripts = bundle::build(places)?;
    let page = page::assemble(places, &page::Parts { wasm, scripts })?;

    fs::create_dir_all(&places.output)?;
    let path = places.output.join("stayband.html");
    fs::write(&path, &page.html)?;
    report(&format!("page     {}", path.display()));
    report(&format!("size     {} bytes", page.html.len()));
    report(&format!("SHA-256  {}", hexadecimal(&Sha256::digest(&page.html))));
    report(&format!("program  {} (SHA-256 of the page without this number, as records name it)", page.program_hash));
    Ok(())
}

/// The bytes as lower-case hexadecimal digits.
fn hexadecimal(bytes: &[u8]) -> String {
    bytes.iter().map(|byte| format!("{byte:02x}")).collect()
}

/// Tells the user something.
#[expect(clippy::print_stdout, reason = "the answer of a command-line program")]
fn report(line: &str) {
    println!("{line}");
}
