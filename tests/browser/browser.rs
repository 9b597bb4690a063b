//! A browser of its own for every test: its driver, its profile and its folder for downloads.

use anyhow::{Context, Result, bail};
use serde_json::json;
use std::env;
use std::io::{BufRead, BufReader};
use std::path::Path;
use std::process::{Child, Command, Stdio};
use tempfile::TempDir;
use thirtyfour::ChromiumLikeCapabilities;
use thirtyfour::prelude::*;

/// Lines of the driver's output in which its port must appear; it prints about five before.
const MOST_DRIVER_LINES: usize = 50;

/// Switches of the browser: no window, no sandbox (tests run as root), nothing that goes to the network by itself.
const SWITCHES: [&str; 9] = [
    "--headless=new",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
    "--hide-scrollbars",
];

/// A running browser.
pub(crate) struct Browser {
    pub(crate) driver: WebDriver,
    /// Holds the browser's profile and, in `downloads`, what it saved.
    pub(crate) folder: TempDir,
    /// Ends with this value.
    _process: DriverProcess,
}

impl Browser {
    /// Starts driver and browser, with a window of this many CSS pixels.
    pub(crate) async fn start(width: u32, height: u32) -> Result<Self> {
        let process = DriverProcess::start()?;
        let folder = tempfile::tempdir()?;
        let downloads = folder.path().join("downloads");
        std::fs::create_dir(&downloads)?;

        let mut capabilities = DesiredCapabilities::chrome();
        for switch in SWITCHES {
            capabilities.add_arg(switch)?;
        }
        capabilities.add_arg(&format!("--user-data-dir={}", folder.path().join("profile").display()))?;
        if let Some(binary) = binary() {
            capabilities.set_binary(&binary)?;
        }
        // A window of its own would be larger by its frame, and never narrower than 500.
        let metrics = json!({ "width": width, "height": height, "pixelRatio": 1, "mobile": false, "touch": false });
        capabilities.add_experimental_option("mobileEmulation", json!({ "deviceMetrics": metrics }))?;
        let preferences = json!({
            "download.default_directory": downloads,
            "download.prompt_for_download": false,
        });
        capabilities.add_experimental_option("prefs", preferences)?;

        let driver = WebDriver::new(&process.address, capabilities)
            .await
            .context("the browser does not start; is Chromium installed beside its driver?")?;
        Ok(Self { driver, folder, _process: process })
    }
}

/// The browser, where the driver would not find it by itself.
fn binary() -> Option<String> {
    let named = env::var("CHROMIUM").ok();
    named.or_else(|| Path::new("/usr/bin/chromium").exists().then(|| "/usr/bin/chromium".to_owned()))
}

/// A driver process, ended when dropped.
struct DriverProcess {
    child: Child,
    address: String,
}

impl DriverProcess {
    fn start() -> Result<Self> {
        let program = env::var("CHROMEDRIVER").unwrap_or_else(|_| "chromedriver".to_owned());
        let mut child = Command::new(&program)
            .arg("--port=0")
            .stdout(Stdio::piped())
            .spawn()
            .with_context(|| format!("{program} does not start; on Debian: apt-get install chromium-driver"))?;
        let output = child.stdout.take().context("the driver has no output")?;
        match port(BufReader::new(output)) {
            Ok(port) => Ok(Self { child, address: format!("http://127.0.0.1:{port}") }),
            Err(error) => {
                child.kill()?;
                Err(error)
            }
        }
    }
}

impl Drop for DriverProcess {
    fn drop(&mut self) {
        // It may have ended by itself; then there is nothing to end.
        let _ = self.child.kill();
        let _ = self.child.wait();
    }
}

/// Reads the port that the driver chose: "... was started successfully on port 12345."
fn port(output: impl BufRead) -> Result<u16> {
    for line in output.lines().take(MOST_DRIVER_LINES) {
        let line = line?;
        if let Some((_, port)) = line.split_once("successfully on port ") {
            return Ok(port.trim_end_matches('.').parse()?);
        }
    }
    bail!("the driver did not say its port")
}
