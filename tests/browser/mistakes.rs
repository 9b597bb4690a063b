//! What is typed wrong is said at its field, and the last good answer stays.

use crate::answers::type_feed_drive;
use crate::page::on_the_page;
use serde_json::json;

#[test]
fn a_missing_bracket_is_said_at_its_field_and_the_last_good_answer_stays_marked_as_stale() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        let before = page.record().await?;

        page.type_into("Plant", "1/(s (0.1 s + 1)(0.02 s + 1)").await?;
        page.shows("plant-problem", "bracket").await?;
        page.shows("stale", "Stale").await?;
        page.shows("answer", "Stable for K from 0 to 60").await?;
        assert_eq!(page.record().await?, before, "the last good record stays");
        let plant = page.field("Plant").await?;
        assert_eq!(plant.attr("aria-invalid").await?.as_deref(), Some("true"));

        page.type_into("Plant", "1/(s (0.1 s + 1)(0.01 s + 1))").await?;
        page.shows("answer", "Stable for K from 0 to 110").await?;
        page.hides("stale").await?;
        page.hides("plant-problem").await?;
        Ok(())
    });
}

/// Wrong inputs: label of the field, what is typed, and where a message about it must stand.
const WRONG: [(&str, &str, &str); 10] = [
    ("Plant", "1/(s ? 2)", "plant-problem"),
    ("Plant", "1/((s + 2)", "plant-problem"),
    ("Plant", "1/(0,5 s + 1)", "plant-problem"),
    ("Plant", "", "plant-problem"),
    ("Controller", "", "controller-problem"),
    ("Sensor", "1/0", "sensor-problem"),
    ("Plant", "1/(beta s + 1)", "problem-quantity-beta"),
    ("Plant", "e^(s^2)/(s + 1)", "plant-problem"),
    ("Plant", "1/(s + 1)^41", "plant-problem loop-problem"),
    ("Sensor", "1e999999999", "sensor-problem"),
];

/// True when a message is shown in one of these places.
const SAID: &str = r#"
    const places = arguments[0].split(" ").map((id) => document.getElementById(id));
    return places.some((place) => place?.checkVisibility() && place.innerText.trim() !== "");
"#;

#[test]
fn every_kind_of_wrong_input_gets_a_message_at_its_field() {
    on_the_page(|page| async move {
        for (label, text, places) in WRONG {
            type_feed_drive(&page).await?;
            page.type_into(label, text).await?;
            page.until(&format!("{text:?} in {label} is found wrong"), SAID, vec![json!(places)]).await?;
            page.shows("stale", "Stale").await?;
            page.shows("answer", "Stable for K from 0 to 60").await?;
        }
        Ok(())
    });
}

#[test]
fn a_wrong_setting_gets_its_message_and_a_right_one_takes_it_away() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        page.type_into("Setting", "12,5").await?;
        page.shows("setting-problem", "point").await?;
        page.type_into("Setting", "12.5").await?;
        page.shows("answer-setting", "12.5").await?;
        page.hides("setting-problem").await?;
        Ok(())
    });
}
