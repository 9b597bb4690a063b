//! Dead time and sampling: typed into the form, and their ranges read on the page and in the record.

use crate::page::{Page, on_the_page};
use anyhow::{Context, Result};
use serde_json::Value;

/// K/s behind a dead time of 1/2 s: the pair is on the axis where ω·T = π/2, so that ω = π rad/s and K = ω.
async fn type_delayed_integrator(page: &Page) -> Result<()> {
    page.press("New").await?;
    page.type_into("Controller", "K").await?;
    page.type_into("Plant", "e^(-0.5 s)/s").await?;
    page.shows("answer", "3.141").await
}

/// The upper end of the one stable range.
fn stable_end(record: &Value) -> Result<Value> {
    let ranges = record["stability"].as_array().context("a list of ranges")?;
    let stable: Vec<&Value> = ranges.iter().filter(|range| range["stable"] == true).collect();
    assert_eq!(stable.len(), 1, "{ranges:?}");
    Ok(stable[0]["to"].clone())
}

#[test]
fn a_dead_time_in_the_plant_and_one_in_its_field_give_the_same_proven_range() {
    on_the_page(|page| async move {
        type_delayed_integrator(&page).await?;
        let edge = stable_end(&page.record().await?)?;
        assert_eq!(edge["proven"], true);
        let close = |found: &Value| found.as_f64().is_some_and(|v| (v - std::f64::consts::PI).abs() < 1e-12);
        assert!(close(&edge["value"]) && close(&edge["omega"]), "{edge}");

        page.type_into("Plant", "1/s").await?;
        page.shows("answer", "above 0").await?;
        page.type_into("Dead time", "0.5").await?;
        page.shows("answer", "3.141").await?;
        assert_eq!(stable_end(&page.record().await?)?["value"], edge["value"]);
        Ok(())
    });
}

#[test]
fn the_dead_time_itself_may_be_the_knob() {
    on_the_page(|page| async move {
        page.press("New").await?;
        page.type_into("Controller", "2").await?;
        page.type_into("Plant", "1/s").await?;
        page.type_into("Dead time", "T").await?;
        // ω = 2 rad/s, and ωT = π/2.
        page.shows("answer", "0.7853").await?;
        let edge = stable_end(&page.record().await?)?;
        let value = edge["value"].as_f64().context("a value")?;
        assert!((value - std::f64::consts::FRAC_PI_4).abs() < 1e-12, "{value}");
        Ok(())
    });
}

#[test]
fn what_cannot_be_a_dead_time_says_what_to_type() {
    on_the_page(|page| async move {
        type_delayed_integrator(&page).await?;
        page.type_into("Plant", "1/s + e^(-0.5 s)/(s + 1)").await?;
        page.shows("plant-problem", "a factor of the whole block").await?;
        page.shows("stale", "Stale").await?;
        page.type_into("Plant", "e^(-0.5 s)/s").await?;
        page.type_into("Dead time", "-1").await?;
        page.shows("dead-time-problem", "never negative").await?;
        Ok(())
    });
}

#[test]
fn a_sampled_controller_gets_its_range_in_the_z_plane() {
    on_the_page(|page| async move {
        page.press("New").await?;
        page.type_into("Controller", "K").await?;
        page.type_into("Plant", "1/s").await?;
        page.tick("sampled").await?;
        page.shows("sampling-period-problem", "sample period").await?;
        // z − 1 + K·h = 0: z = −1 at K = 2/h.
        page.type_into("Sample period", "0.1").await?;
        page.shows("answer", "20").await?;
        let record = page.record().await?;
        let edge = stable_end(&record)?;
        assert_eq!(edge["kind"], "alternation crossing");
        assert_eq!(record["timing"]["plane"], "z");
        assert!(edge["value"].as_f64().is_some_and(|v| (v - 20.0).abs() < 1e-11), "{edge}");

        // One period late: z² − z + K·h = 0, |z| = 1 at K·h = 1.
        page.type_into("Computation delay", "1").await?;
        page.shows("answer", "0 to 10").await?;
        page.type_into("Controller", "K/z").await?;
        page.type_into("Computation delay", "").await?;
        page.shows("answer", "0 to 10").await?;
        page.type_into("Setting", "5").await?;
        page.shows("periods-words", "0.2").await
    });
}
