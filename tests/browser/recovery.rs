//! When the engine breaks, the page says so and goes on.

use crate::answers::type_feed_drive;
use crate::page::on_the_page;

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
