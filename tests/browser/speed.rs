//! How long loops take in the browser, printed in milliseconds; of order 10 unless another is said:
//!
//! * the whole record without requirements (exact ranges, locus and landmarks, and their way out of WebAssembly), and
//!   beside it numpy's batched `eigvals` for as many points of the locus;
//! * the whole record with every requirement on, so all lanes; it should stay below 100 ms;
//! * one step of the pointer on the page, from the key press until poles, responses, margins and figures stand in the
//!   page and are laid out; it should stay below a frame, 16.7 ms;
//! * the whole record of an order-6 loop with dead time, which should stay below 100 ms, and with a sampled controller,
//!   below 50 ms.
//!
//! `cargo bench --package stayband-tests --bench speed`; needs the built page, Chromium, and numpy in the Python that
//! the variable PYTHON names. It measures and judges nothing: a slow machine is no fault of the program.

mod browser;
#[expect(dead_code, reason = "the tests need more of it")]
mod page;

use anyhow::{Context, Result, bail};
use page::on_the_page;
use serde_json::{Value, json};
use std::env;
use std::io::Write;
use std::path::Path;
use std::process::{Command, Stdio};

/// A flexible axis with two resonances and a filtered controller, of our own invention; so are the others.
const AXIS: &str = r#"{
    controller: "K (0.3 s + 1)/(tau s + 1)",
    plant: "(s^2 + 0.4 s + 9)/(s (s + 1)(s + 3)(s + 8)(s + 20)(s^2 + 0.6 s + 16)(s^2 + 3 s + 60))",
}"#;

/// A belt behind a lag, of order 6 with dead time.
const DELAYED: &str = r#"{
    controller: "K (0.5 s + 1)/(tau s + 1)",
    plant: "e^(-0.05 s)/((s + 1)(s + 2)(s + 5)(s^2 + s + 30))",
}"#;

/// The same order with a sampled controller.
const SAMPLED: &str = r#"{
    controller: "K (0.5 s + 1)/(tau s + 1)",
    plant: "1/((s + 1)(s + 2)(s + 5)(s^2 + s + 30))",
    sampling: { period: "0.02", delay: "1" },
}"#;

/// The project of a run, each with another time constant, so that nothing can be kept from the one before.
const PROJECT: &str = r#"
    const project = (run, requirements) => JSON.stringify({
        format: "stayband-project/1",
        loop,
        quantities: [{ symbol: "tau", value: `0.02${run}` }],
        knob: "K",
        setting: { value: "100" },
        requirements,
    });
"#;

/// Sends the worker one project after another. Answers with the sorted times, and with the last record and the knobs of
/// its branches.
const MEASURE: &str = r#"
    const [runs, requirements, done] = arguments;
    const textOf = (id) => document.getElementById(id).textContent;
    // As www/src/packed.ts reads it.
    const number = (code) => code - 33 - (code > 38) - (code > 60) - (code > 62);
    const inflate = ({ textContent: text, dataset }) => {
        const bytes = new Uint8Array(Number(dataset.bytes));
        let [at, waiting, count] = [0, 0, 0];
        for (let index = 0; index < text.length; index += 2) {
            waiting |= (number(text.charCodeAt(index)) * 91 + number(text.charCodeAt(index + 1))) << count;
            for (count += 13; count >= 8 && at < bytes.length; count -= 8, waiting >>>= 8) bytes[at++] = waiting & 255;
        }
        if (at < bytes.length) bytes[at] = waiting & 255;
        return new Response(new Blob([bytes]).stream().pipeThrough(new DecompressionStream("deflate-raw"))).arrayBuffer();
    };
    const times = [];
    const worker = new Worker(URL.createObjectURL(new Blob([textOf("worker-source")])));
    const ask = () => worker.postMessage({ id: times.length, project: project(times.length, requirements) });
    worker.onerror = (event) => done({ error: event.message });
    worker.onmessage = ({ data }) => {
        if (data.ready) return ask();
        times.push(data.milliseconds);
        if (times.length < runs) return ask();
        const knobs = data.branches.flatMap(({ points }) => [...points].filter((_, index) => index % 3 === 2));
        done({ times: times.sort((a, b) => a - b), record: data.answer.record, problems: data.answer.problems, knobs });
    };
    inflate(document.getElementById("engine-wasm")).then((wasm) => worker.postMessage({ wasm, programHash: null }));
"#;

/// Moves the pointer by keys, one step after the other, and measures each until the answer to it is drawn.
///
/// The page draws before the next frame; here a frame comes at once, so that the work is measured and not the waiting
/// for the screen. Reading a size at the end makes the browser lay everything out.
const MEASURE_STEPS: &str = r#"
    const [runs, requirements, done] = arguments;
    const beat = new MessageChannel();
    const queue = [];
    beat.port1.onmessage = () => queue.splice(0).forEach((draw) => draw(performance.now()));
    window.requestAnimationFrame = (draw) => queue.push(draw) && beat.port2.postMessage(null);
    const pause = () => new Promise((resolve) => setTimeout(resolve));
    const drawn = (element) => new Promise((resolve) => {
        const observer = new MutationObserver(() => (observer.disconnect(), resolve()));
        observer.observe(element, { childList: true, subtree: true, attributes: true });
    });
    const run = async () => {
        await window.stayband.open(project(0, requirements));
        await new Promise((resolve) => setTimeout(resolve, 1000));
        const slider = document.querySelector("[role=slider]");
        const parts = ["plane", "response", "figures", "poles"].map((id) => document.getElementById(id));
        const times = [];
        for (let step = 0; step < runs; step += 1) {
            const start = performance.now();
            const all = Promise.all(parts.map(drawn));
            slider.dispatchEvent(new KeyboardEvent("keydown", { key: step % 2 ? "ArrowLeft" : "ArrowRight", bubbles: true }));
            await all;
            document.body.getBoundingClientRect();
            times.push(performance.now() - start);
            await pause();
        }
        const { project: typed, margins, step } = window.stayband.record();
        return { times: times.sort((a, b) => a - b), setting: typed.setting.value, complete: margins !== null && step !== null };
    };
    run().then(done, (error) => done({ error: String(error) }));
"#;

/// Enough for a steady median, in a second or two.
const RUNS: u32 = 300;
/// The same for what takes longer.
const FEW_RUNS: u32 = 30;

/// Every requirement with a limit of our own choice, near what the loop has at the setting.
const REQUIREMENTS: [(&str, &str); 22] = [
    ("damping-ratio", "0.02"),
    ("decay-rate", "0.05"),
    ("natural-frequency-minimum", "0.1"),
    ("natural-frequency-maximum", "9"),
    ("gain-margin-up", "3"),
    ("gain-margin-down", "3"),
    ("phase-margin", "20"),
    ("delay-margin", "0.05"),
    ("peak-sensitivity", "3"),
    ("bandwidth", "0.05"),
    ("overshoot", "60"),
    ("undershoot", "20"),
    ("rise-time", "30"),
    ("settling-time-2", "90"),
    ("settling-time-5", "70"),
    ("peak-time", "60"),
    ("step-error", "5"),
    ("ramp-error", "50"),
    ("parabola-error", "1000"),
    ("load-peak", "1"),
    ("load-final", "1"),
    ("controller-peak", "9000"),
];

fn main() {
    on_the_page(|page| async move {
        let measured = measure(&page, AXIS, MEASURE, RUNS, json!([])).await?;
        let order = measured["record"]["model"]["order"].as_u64().context("an order")?;
        let points = measured["knobs"].as_array().map_or(0, Vec::len);
        say(&format!("order {order}, {points} points of the locus, {RUNS} runs in {}", browser_name(&page).await?));
        let whole = report("whole record in the browser", &measured)?;
        let numpy = numpy(&measured)?;
        say(&format!("numpy's batched eigvals for as many points: median {numpy:.2} ms"));
        say(&format!("ratio: the whole record takes {:.2} of numpy's time", whole / numpy));

        let all: Value = REQUIREMENTS.iter().map(|(kind, limit)| json!({ "kind": kind, "limit": limit })).collect();
        let lanes = measure(&page, AXIS, MEASURE, FEW_RUNS, all.clone()).await?;
        report("whole record with every requirement on (should be below 100 ms)", &lanes)?;
        let steps = measure(&page, AXIS, MEASURE_STEPS, RUNS, json!([])).await?;
        if steps["complete"] != json!(true) {
            bail!("the loop has no answer at the setting: {steps:#}");
        }
        report("one step of the pointer until everything is drawn (should be below 16.7 ms)", &steps)?;
        let steps = measure(&page, AXIS, MEASURE_STEPS, RUNS, all).await?;
        report("the same with every requirement on", &steps)?;

        let delayed = measure(&page, DELAYED, MEASURE, RUNS, json!([])).await?;
        report("whole record of order 6 with dead time (should be below 100 ms)", &delayed)?;
        let sampled = measure(&page, SAMPLED, MEASURE, RUNS, json!([])).await?;
        report("whole record of order 6, sampled (should be below 50 ms)", &sampled)?;
        Ok(())
    });
}

/// What a script of this file measured.
async fn measure(page: &page::Page, of: &str, script: &str, runs: u32, requirements: Value) -> Result<Value> {
    let script_of = format!("const loop = {of};{PROJECT}{script}");
    let measured = page.run_async(&script_of, vec![runs.into(), requirements]).await?;
    if measured["times"].as_array().is_none_or(Vec::is_empty) || measured["record"].is_null() && script == MEASURE {
        bail!("no times: {measured:#}");
    }
    Ok(measured)
}

/// Prints the median, the fastest and the slow end of measured times, and returns the median in ms.
fn report(what: &str, measured: &Value) -> Result<f64> {
    let times: Vec<f64> = measured["times"].as_array().into_iter().flatten().filter_map(Value::as_f64).collect();
    let at = |part: usize| times.get((times.len() * part / 100).min(times.len() - 1)).copied().context("no times");
    let (fastest, median, slow) = (at(0)?, at(50)?, at(95)?);
    say(&format!("{what}: median {median:.2} ms, fastest {fastest:.2} ms, 95 of 100 below {slow:.2} ms"));
    Ok(median)
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
