//! The built page in a real browser, opened from disk as a user would, driven through W3C WebDriver.
//!
//! Needs `target/page/stayband.html` (`cargo page`), Chromium and its driver; `tests/run` sees to all three.

mod browser;
mod page;

mod accessible;
mod answers;
mod closed;
mod exports;
mod hostile;
mod identity;
mod keeping;
mod mistakes;
mod picture;
mod pointer;
mod recovery;
mod requirements;
mod sheet;
mod shelf;
mod timing;
