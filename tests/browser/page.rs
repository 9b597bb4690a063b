//! The page under test, and the words with which tests speak of it.

use crate::browser::Browser;
use anyhow::{Context, Result, bail};
use serde_json::{Value, json};
use std::env;
use std::future::Future;
use std::path::{Path, PathBuf};
use std::time::{Duration, Instant};
use thirtyfour::prelude::*;

/// Width and height of the window in CSS pixels: a common notebook.
const WINDOW: (u32, u32) = (1440, 900);
/// How long a test waits for something the page does in well under a second, on a machine that is busy.
const PATIENCE: Duration = Duration::from_secs(20);
/// How often it looks.
const GLANCE: Duration = Duration::from_millis(50);

/// Runs a test on the freshly opened page, and closes the browser whatever comes of it.
pub(crate) fn on_the_page<Test, Work>(test: Test)
where
    Test: FnOnce(Page) -> Work,
    Work: Future<Output = Result<()>> + Send + 'static,
{
    on_the_page_with(WINDOW, test);
}

/// The same with a window of this width and height.
pub(crate) fn on_the_page_with<Test, Work>(window: (u32, u32), test: Test)
where
    Test: FnOnce(Page) -> Work,
    Work: Future<Output = Result<()>> + Send + 'static,
{
    let runtime = tokio::runtime::Runtime::new().expect("a runtime for the test");
    runtime.block_on(async {
        let browser = Browser::start(window.0, window.1).await.expect("a browser for the test");
        let page = Page { driver: browser.driver.clone(), downloads: browser.folder.path().join("downloads") };
        page.open("").await.expect("the page, opened from disk");
        let outcome = tokio::spawn(test(page)).await;
        browser.driver.clone().quit().await.expect("the browser quits");
        match outcome {
            Ok(Ok(())) => {}
            Ok(Err(error)) => panic!("{error:?}"),
            Err(panic) => std::panic::resume_unwind(panic.into_panic()),
        }
    });
}

/// The open page.
#[derive(Clone)]
pub(crate) struct Page {
    pub(crate) driver: WebDriver,
    /// Where the browser saves.
    pub(crate) downloads: PathBuf,
}

impl Page {
    /// Opens the page from disk, with this behind its address (`#…`), and waits until it has an answer.
    pub(crate) async fn open(&self, part: &str) -> Result<()> {
        let address = format!("file://{}{part}", file()?.display());
        self.driver.goto(&address).await?;
        self.answered().await
    }

    /// Waits until there is an answer on the screen.
    async fn answered(&self) -> Result<()> {
        self.until("the page answers", "return (window.stayband?.record() ?? null) !== null", vec![]).await
    }

    /// The record on the screen.
    pub(crate) async fn record(&self) -> Result<Value> {
        self.run("return window.stayband.record()", vec![]).await
    }

    /// The input or choice with this label.
    pub(crate) async fn field(&self, label: &str) -> Result<WebElement> {
        let script = r#"
            const label = [...document.querySelectorAll("label")].find((one) => one.textContent.trim() === arguments[0]);
            return label?.control ?? document.querySelector(`[aria-label="${arguments[0]}"]`);
        "#;
        let found = self.driver.execute(script, vec![json!(label)]).await?;
        found.element().with_context(|| format!("no field is labelled {label}"))
    }

    /// Types this into the field with this label, in place of what stands there.
    pub(crate) async fn type_into(&self, label: &str, text: &str) -> Result<()> {
        let field = self.field(label).await?;
        field.send_keys(Key::Control + "a").await?;
        field.send_keys(Key::Delete + "").await?;
        field.send_keys(text).await?;
        Ok(())
    }

    /// Chooses an option of the choice with this label.
    pub(crate) async fn choose(&self, label: &str, option: &str) -> Result<()> {
        let field = self.field(label).await?;
        field.find(By::XPath(format!("./option[@value='{option}']"))).await?.click().await?;
        Ok(())
    }

    /// Presses the button with this text.
    pub(crate) async fn press(&self, text: &str) -> Result<()> {
        let button = By::XPath(format!("//button[normalize-space()='{text}']"));
        self.driver.find(button).await?.click().await?;
        Ok(())
    }

    /// Clicks the box with this id.
    pub(crate) async fn tick(&self, id: &str) -> Result<()> {
        self.driver.find(By::Id(id)).await?.click().await?;
        Ok(())
    }

    /// What stands in the element with this id, as a user sees it.
    pub(crate) async fn text(&self, id: &str) -> Result<String> {
        Ok(self.driver.find(By::Id(id)).await?.text().await?)
    }

    /// Waits until the element with this id is shown and its text contains `part`.
    pub(crate) async fn shows(&self, id: &str, part: &str) -> Result<()> {
        // The inner text of an element that is not shown is all of its text, so it must be shown, too.
        let script = r#"
            const place = document.getElementById(arguments[0]);
            return (place?.checkVisibility() ?? false) && place.innerText.includes(arguments[1]);
        "#;
        let waited = self.until(part, script, vec![json!(id), json!(part)]).await;
        let text = self.text(id).await?;
        waited.with_context(|| format!("#{id} shows {text:?}, not {part:?}"))
    }

    /// The value of a piece of JavaScript, run in the page.
    pub(crate) async fn run(&self, script: &str, arguments: Vec<Value>) -> Result<Value> {
        let value = self.driver.execute(script, arguments).await.with_context(|| script.to_owned())?;
        Ok(value.json().clone())
    }

    /// What a piece of JavaScript hands to its last argument, a function, in its own time.
    pub(crate) async fn run_async(&self, script: &str, arguments: Vec<Value>) -> Result<Value> {
        let value = self.driver.execute_async(script, arguments).await.with_context(|| script.to_owned())?;
        Ok(value.json().clone())
    }

    /// Shows the page to a user with this preference: a media feature and its value.
    pub(crate) async fn prefer(&self, feature: &str, value: &str) -> Result<()> {
        let features = json!({ "features": [{ "name": feature, "value": value }] });
        self.driver.cdp().send_raw("Emulation.setEmulatedMedia", features).await?;
        Ok(())
    }

    /// Waits until the element with this id is not shown.
    pub(crate) async fn hides(&self, id: &str) -> Result<()> {
        let script = "return !document.getElementById(arguments[0]).checkVisibility()";
        self.until(&format!("#{id} is hidden"), script, vec![json!(id)]).await
    }

    /// Waits until a piece of JavaScript returns true.
    pub(crate) async fn until(&self, what: &str, script: &str, arguments: Vec<Value>) -> Result<()> {
        let start = Instant::now();
        while start.elapsed() < PATIENCE {
            if self.run(script, arguments.clone()).await? == json!(true) {
                return Ok(());
            }
            tokio::time::sleep(GLANCE).await;
        }
        bail!("waited {PATIENCE:?} in vain until {what}")
    }
}

/// The built page.
pub(crate) fn file() -> Result<PathBuf> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).parent().context("the tests lie in the workspace")?;
    let target = match env::var_os("CARGO_TARGET_DIR") {
        Some(folder) => PathBuf::from(folder),
        None => root.join("target"),
    };
    let file = target.join("page").join("stayband.html");
    file.canonicalize().with_context(|| format!("{} is missing; type `cargo page` first", file.display()))
}
