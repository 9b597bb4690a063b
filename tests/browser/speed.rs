//! How long the whole record of an order-10 loop takes in the browser: exact ranges, locus and landmarks, and their way
//! out of WebAssembly. Printed in milliseconds, and beside it numpy's batched `eigvals` for as many points of the locus.
//!
//! `cargo bench --package stayband-tests --bench speed`; needs the built page, Chromium, and numpy in the Python that
//! the variable PYTHON names. It measures and judges nothing: a slow machine is no fault of the program.

mod browser;
#[expect(dead_code, reason = "the tests need more of it")]
mod page;

use anyhow::{Context, Result, bail};
use page::on_the_page;
use serde_json::Value;
use std::env;
use std::io::Write;
use std::path::Path;
use std::process::{Command, Stdio};

/// Sends the worker one project after another, each with another time constant, so that nothing can be kept from the
/// one before. Answers with the sorted times, and with the last record and the knobs of its branches.
///
/// The loop is our own invention: a flexible axis with two resonances and a filtered controller.
const MEASURE: &str = r#"
    const [runs, done] = arguments;
    const textOf = (id) => document.getElementById(id).textContent;
    const inflate = (text) => {
        const bytes = Uint8Array.from(atob(text), (character) => character.charCodeAt(0));
        return new Response(new Blob([bytes]).stream().pipeThrough(new DecompressionStream("deflate-raw"))).arrayBuffer();
    };
    const project = (run) => JSON.stringify({
        format: "stayband-project/1",
        loop: {
            controller: "K (0.3 s + 1)/(tau s + 1)",
            plant: "(s^2 + 0.4 s + 9)/(s (s + 1)(s + 3)(s + 8)(s + 20)(s^2 + 0.6 s + 16)(s^2 + 3 s + 60))",
        },
        quantities: [{ symbol: "tau", value: `0.02${run}` }],
        knob: "K",
        setting: { value: "100" },
    });
    const times = [];
    const worker = new Worker(URL.createObjectURL(new Blob([textOf("worker-source")])));
    const ask = () => worker.postMessage({ id: times.length, project: project(times.length) });
    worker.onerror = (event) => done({ error: event.message });
    worker.onmessage = ({ data }) => {
        if (data.ready) return ask();
        times.push(data.milliseconds);
        if (times.length < runs) return ask();
        const knobs = data.branches.flatMap(({ points }) => [...points].filter((_, index) => index % 3 === 2));
        done({ times: times.sort((a, b) => a - b), record: data.answer.record, problems: data.answer.problems, knobs });
    };
    inflate(textOf("engine-wasm")).then((wasm) => worker.postMessage({ wasm, programHash: null }));
"#;

/// Enough for a steady median, in a second or two.
const RUNS: u32 = 300;

fn main() {
    on_the_page(|page| async move {
        let measured = page.run_async(MEASURE, vec![RUNS.into()]).await?;
        let record = &measured["record"];
        if record.is_null() {
            bail!("no record: {measured:#}");
        }
        let times: Vec<f64> = measured["times"].as_array().into_iter().flatten().filter_map(Value::as_f64).collect();
        let median = *times.get(times.len() / 2).context("no times")?;
        let fastest = *times.first().context("no times")?;
        let order = record["model"]["order"].as_u64().context("an order")?;
        let points = measured["knobs"].as_array().map_or(0, Vec::len);
        say(&format!("order {order}, {points} points of the locus, {RUNS} runs in {}", browser_name(&page).await?));
        say(&format!("whole record in the browser: median {median:.2} ms, fastest {fastest:.2} ms"));

        let numpy = numpy(&measured)?;
        say(&format!("numpy's batched eigvals for as many points: median {numpy:.2} ms"));
        say(&format!("ratio: the whole record takes {:.2} of numpy's time", median / numpy));
        Ok(())
    });
}

/// Median time in ms that numpy needs for the eigenvalues alone.
fn numpy(measured: &Value) -> Result<f64> {
    let python = env::var("PYTHON").unwrap_or_else(|_| "python3".to_owned());
    let mut process = Command::new(&python)
        .arg(Path::new(env!("CARGO_MANIFEST_DIR")).join("browser/speed.py"))
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .spawn()
        .with_context(|| format!("{python} does not start"))?;
    process.stdin.take().context("no way in")?.write_all(measured.to_string().as_bytes())?;
    let output = process.wait_with_output()?;
    if !output.status.success() {
        bail!("{python} ended with {}; has it numpy?", output.status);
    }
    Ok(String::from_utf8(output.stdout)?.trim().parse()?)
}

async fn browser_name(page: &page::Page) -> Result<String> {
    let agent = page.run("return navigator.userAgent.match(/Chrome\\/\\d+/)[0]", vec![]).await?;
    Ok(agent.as_str().unwrap_or("a browser").replace('/', " "))
}

#[expect(clippy::print_stdout, reason = "a bench speaks to the terminal")]
fn say(line: &str) {
    println!("{line}");
}
