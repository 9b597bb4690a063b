//! Requirements, the permitted settings they leave, and the controller's own scale.

use crate::page::{Page, on_the_page};
use anyhow::{Context, Result};
use serde_json::json;
use thirtyfour::prelude::*;

/// A levitated roller, invented, whose damping and static error leave 30 to 44 of a register with whole steps.
async fn open_roller(page: &Page) -> Result<()> {
    let project = json!({
        "format": "stayband-project/1",
        "title": "Roller of the test (invented)",
        "loop": {
            "controller": "K (0.12 s + 1)/(0.012 s + 1)",
            "plant": "14/((s - 3)(s + 9)(0.008 s + 1))",
            "sensor": "0.5",
            "feedback": "negative",
        },
        "knob": "K",
        "setting": { "value": "37", "step": "1" },
        "requirements": [
            { "kind": "damping-ratio", "limit": "0.5" },
            { "kind": "step-error", "limit": "15" },
        ],
    });
    page.run("window.stayband.open(arguments[0])", vec![project]).await?;
    page.shows("answer", "Use 30 to 44").await
}

/// Types into a field found by its accessible name.
async fn type_limit(page: &Page, name: &str, text: &str) -> Result<()> {
    let field = page.driver.find(By::Css(format!("input[aria-label='{name}']"))).await?;
    field.clear().await?;
    field.send_keys(text).await?;
    Ok(())
}

#[test]
fn a_requirement_that_is_changed_changes_the_permitted_settings() {
    on_the_page(|page| async move {
        open_roller(&page).await?;
        let permitted = page.record().await?["permitted"]["setting"].clone();
        assert_eq!(permitted, json!([["30", "44"]]));
        type_limit(&page, "Damping ratio, at least", "0.55").await?;
        page.shows("answer", "Use 30 to 4").await?;
        page.until("fewer settings", "return window.stayband.record().permitted.setting[0][1] !== '44'", vec![])
            .await?;
        type_limit(&page, "Damping ratio, at least", "0.8").await?;
        page.until("a conflict", "return window.stayband.record().permitted.conflict !== null", vec![]).await?;
        page.shows("answer", "static error").await
    });
}

#[test]
fn the_pointer_goes_to_the_ends_of_the_permitted_range() {
    on_the_page(|page| async move {
        open_roller(&page).await?;
        let pointer = page.driver.find(By::Css("[role=slider]")).await?;
        for (key, wanted) in [(Key::End, "44"), (Key::Home, "30"), (Key::Right, "31")] {
            pointer.send_keys(key + "").await?;
            let script = "return window.stayband.project().setting.value === arguments[0]";
            page.until(&format!("setting {wanted}"), script, vec![wanted.into()]).await?;
        }
        Ok(())
    });
}

#[test]
fn a_proportional_band_turns_the_permitted_settings_round() {
    on_the_page(|page| async move {
        open_roller(&page).await?;
        let script = "const project = window.stayband.project(); \
                      project.setting = { ...project.setting, value: '2.7', direction: 'reciprocal', factor: '100', step: '0.1' }; \
                      window.stayband.open(project)";
        page.run(script, vec![]).await?;
        // 100/44.889… = 2.227… and 100/(207/7) = 3.381…, rounded inward.
        page.shows("answer", "Use 2.3 to 3.3").await?;
        let record = page.record().await?;
        let met = record["requirements"].as_array().context("requirements")?;
        assert!(met.iter().all(|requirement| requirement["met"] == true), "{met:?}");
        Ok(())
    });
}

#[test]
fn a_limit_that_cannot_be_gets_its_message_at_its_row() {
    on_the_page(|page| async move {
        open_roller(&page).await?;
        type_limit(&page, "Damping ratio, at least", "1.5").await?;
        page.shows("problem-requirement-damping-ratio", "between 0 and 1").await?;
        page.shows("answer", "Use 30 to 44").await
    });
}
