//! The screenshot of the README: `target/page/screenshot.png`, copied to `tests/browser/screenshot.png` by hand.

use crate::page::{file, on_the_page};
use std::fs;

#[test]
fn the_first_demo_is_drawn_for_the_readme() {
    on_the_page(|page| async move {
        page.run("document.querySelectorAll('#demo-list button')[0].click()", vec![]).await?;
        let drawn = "return document.querySelectorAll('#plane path').length > 5";
        page.until("the locus is drawn", drawn, vec![]).await?;
        let picture = page.driver.screenshot_as_png().await?;
        assert!(picture.len() > 20_000, "{} bytes are no picture of a full page", picture.len());
        fs::write(file()?.with_file_name("screenshot.png"), picture)?;
        Ok(())
    });
}
