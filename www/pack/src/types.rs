//! The TypeScript types of project, record and answer, made from the Rust ones, and the table of requirement kinds.
//!
//! `www/src/types.ts` is committed, so that an editor knows the types before the first build; the check makes sure
//! that it is what the generator makes.

use crate::places::Places;
use anyhow::{Context, Result, bail};
use stayband_core::answer::Answer;
use stayband_core::project::{Project, RequirementKind};
use stayband_core::ranges::requirements::{at_least, unit};
use std::any::TypeId;
use std::collections::BTreeMap;
use std::fmt::Write;
use std::fs;
use std::path::PathBuf;
use ts_rs::{Config, TS, TypeVisitor};

/// The head of the generated file.
const HEAD: &str =
    "// Made by `cargo page` from the types of the core (core/src/project.rs, record/, answer.rs). Do not edit.\n";

/// Writes the types, where they are not already there.
pub(crate) fn write(places: &Places) -> Result<()> {
    let path = path(places);
    let text = generate();
    // An unchanged file keeps its time, so that nothing is built again for it.
    if fs::read_to_string(&path).ok().as_deref() != Some(&text) {
        fs::write(&path, text).with_context(|| format!("cannot write {}", path.display()))?;
    }
    Ok(())
}

/// An error where the committed types are not what the generator makes.
pub(crate) fn check(places: &Places) -> Result<()> {
    let path = path(places);
    let committed = fs::read_to_string(&path).with_context(|| format!("cannot read {}", path.display()))?;
    if committed != generate() {
        bail!("{} is not what the core's types say; type `cargo page` and commit it", path.display());
    }
    crate::report("www/src/types.ts is what the core's types say");
    Ok(())
}

fn path(places: &Places) -> PathBuf {
    places.www.join("src").join("types.ts")
}

/// The types in alphabetical order.
fn generate() -> String {
    let mut collection = Collection::default();
    collection.visit::<Project>();
    collection.visit::<Answer>();

    let mut text = HEAD.to_owned();
    for declaration in collection.declarations.values() {
        // Writing to a string cannot fail.
        let _ = write!(text, "\n{declaration}\n");
    }
    text.push_str(&requirement_facts());
    // The generator leaves spaces at the ends of lines.
    text.lines().map(|line| format!("{}\n", line.trim_end())).collect()
}

/// What the core says of every kind of requirement, so that the page need not say it again.
fn requirement_facts() -> String {
    let mut text = "\n/** Unit of limit and figure, and whether the figure must be at least the limit, for every kind. */\n\
        export const REQUIREMENT_FACTS: { readonly [kind in RequirementKind]: { readonly unit: string; readonly atLeast: boolean } } = {\n"
        .to_owned();
    for kind in RequirementKind::ALL {
        // A kind serializes to its name in quotes, and writing to a string cannot fail.
        let name = serde_json::to_string(&kind).unwrap_or_default();
        let _ = writeln!(text, "  {name}: {{ unit: {:?}, atLeast: {} }},", unit(kind), at_least(kind));
    }
    text + "};\n"
}

/// The declarations of all types that were visited, and of those they are made of.
#[derive(Default)]
struct Collection {
    seen: Vec<TypeId>,
    /// Name to declaration.
    declarations: BTreeMap<String, String>,
}

impl TypeVisitor for Collection {
    fn visit<T: TS + 'static + ?Sized>(&mut self) {
        if self.seen.contains(&TypeId::of::<T>()) {
            return;
        }
        self.seen.push(TypeId::of::<T>());
        let config = Config::new();
        // Numbers, strings and lists have no file of their own and no declaration.
        if T::output_path().is_some() {
            let docs = T::docs().unwrap_or_default();
            let declaration = format!("{}export {}", docs, T::decl(&config));
            self.declarations.insert(T::ident(&config), declaration);
        }
        T::visit_dependencies(self);
        T::visit_generics(self);
    }
}
