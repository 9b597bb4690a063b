//! When the engine breaks or takes long, the page says so and goes on.

use crate::answers::type_feed_drive;
use crate::page::on_the_page;
use thirtyfour::By;

/// Makes the next message to a worker one that it cannot read, once.
const BREAK_ONCE: &str = r#"
    const post = Worker.prototype.postMessage;
    Worker.prototype.postMessage = function () {
        Worker.prototype.postMessage = post;
        post.call(this, { id: "no number" });
    };
"#;

#[test]
fn a_broken_engine_is_said_and_the_next_change_is_answered_by_a_new_one() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        page.run(BREAK_ONCE, vec![]).await?;
        // One letter, so that one message is lost.
        page.field("Setting").await?.send_keys("9").await?;
        page.shows("message", "stopped unexpectedly").await?;
        page.type_into("Setting", "12").await?;
        page.shows("answer-setting", "12").await
    });
}

/// Loses the next message to a worker, so that its answer never comes.
const LOSE_ONCE: &str = r#"
    const post = Worker.prototype.postMessage;
    Worker.prototype.postMessage = function () { Worker.prototype.postMessage = post; };
"#;

#[test]
fn long_work_is_shown_does_not_hold_up_typing_and_can_be_stopped() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        assert_eq!(page.text("busy").await?, "");
        page.run(LOSE_ONCE, vec![]).await?;
        page.type_into("Plant", "1/(s (0.1 s + 1)(0.01 s + 1))").await?;
        page.shows("busy", "Computing").await?;
        let plant = page.field("Plant").await?.prop("value").await?;
        assert_eq!(plant.as_deref(), Some("1/(s (0.1 s + 1)(0.01 s + 1))"), "typing goes on");

        page.driver.find(By::Id("stop")).await?.click().await?;
        page.hides("busy").await?;
        page.type_into("Setting", "12").await?;
        page.shows("answer", "to 110").await
    });
}
