//! The `wasm` crate, compiled for the browser, with its JavaScript glue.
//!
//! wasm-opt is not run over it: it took 1.3 % off the deflated bytes (289,183 to 285,359 by -O2) for 9 seconds a build.

use crate::places::Places;
use crate::run::{read, run};
use anyhow::{Context, Result};
use std::env;
use std::ffi::OsString;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;
use wasm_bindgen_cli_support::Bindgen;

/// What the crate is compiled for.
const TARGET: &str = "wasm32-unknown-unknown";
/// The profile of Cargo.toml.
const PROFILE: &str = "web";
/// The name of the glue's files in `www/glue`.
const GLUE: &str = "stayband_wasm";
/// Vector instructions: every browser of the baseline has them (Chrome since 91, Firefox 89, Safari 16.4).
const VECTORS: &str = "target-feature=+simd128";

/// Compiles the crate, writes the glue to `www/glue` and returns the WebAssembly.
pub(crate) fn build(places: &Places) -> Result<Vec<u8>> {
    ensure_target(places)?;
    let compiled = compile(places)?;
    glue(places, &compiled)
}

/// Adds the target to the toolchain where it is missing. Not every rustup does that by itself.
fn ensure_target(places: &Places) -> Result<()> {
    let library = read(rustc(places).args(["--print", "target-libdir", "--target", TARGET]))?;
    if Path::new(&library).exists() {
        return Ok(());
    }
    run(Command::new("rustup").current_dir(&places.root).args(["target", "add", TARGET]))
        .with_context(|| format!("Rust's library for {TARGET} is missing; type `rustup target add {TARGET}`"))
}

fn compile(places: &Places) -> Result<PathBuf> {
    let cargo = env::var_os("CARGO").unwrap_or_else(|| "cargo".into());
    run(Command::new(cargo)
        .current_dir(&places.root)
        .args(["build", "--locked", "--package", "stayband-wasm", "--lib"])
        .args(["--target", TARGET, "--profile", PROFILE])
        .arg("--target-dir")
        .arg(&places.target)
        .env("CARGO_ENCODED_RUSTFLAGS", flags(places)?)
        .env_remove("RUSTFLAGS"))?;
    Ok(places.target.join(TARGET).join(PROFILE).join("stayband_wasm.wasm"))
}

/// Compiler flags, separated as Cargo wants it. Paths are written as if the sources lay in fixed folders, so that the
/// bytes do not depend on where they really lie.
fn flags(places: &Places) -> Result<OsString> {
    let mut flags = vec![OsString::from("-C"), OsString::from(VECTORS)];
    let mut remap = |from: &Path, to: &str| {
        let mut flag = OsString::from("--remap-path-prefix=");
        flag.push(from);
        flag.push("=");
        flag.push(to);
        flags.push(flag);
    };
    remap(&places.root, "/stayband");
    for registry in registries()? {
        remap(&registry, "/crates");
    }
    let sysroot = PathBuf::from(read(rustc(places).args(["--print", "sysroot"]))?);
    remap(&sysroot.join("lib/rustlib/src/rust"), "/rust");
    Ok(flags.join(&OsString::from("\u{1f}")))
}

/// The folders in which Cargo keeps the sources of the libraries.
fn registries() -> Result<Vec<PathBuf>> {
    let home = match env::var_os("CARGO_HOME") {
        Some(home) => PathBuf::from(home),
        None => env::home_dir().context("no home folder, and no CARGO_HOME")?.join(".cargo"),
    };
    let sources = home.join("registry").join("src");
    let mut folders = Vec::new();
    for entry in fs::read_dir(&sources).with_context(|| format!("cannot read {}", sources.display()))? {
        folders.push(entry?.path());
    }
    folders.sort();
    Ok(folders)
}

/// Makes the glue and the WebAssembly that goes with it.
fn glue(places: &Places, compiled: &Path) -> Result<Vec<u8>> {
    let mut output = Bindgen::new()
        .input_path(compiled)
        .web(true)?
        .typescript(true)
        .remove_name_section(true)
        .remove_producers_section(true)
        .generate_output()?;
    let folder = places.www.join("glue");
    fs::create_dir_all(&folder)?;
    fs::write(folder.join(format!("{GLUE}.js")), output.js())?;
    fs::write(folder.join(format!("{GLUE}.d.ts")), output.ts().context("the glue has no types")?)?;
    Ok(output.wasm_mut().emit_wasm())
}

/// The compiler of this toolchain.
fn rustc(places: &Places) -> Command {
    let mut command = Command::new(env::var_os("RUSTC").unwrap_or_else(|| "rustc".into()));
    command.current_dir(&places.root);
    command
}
