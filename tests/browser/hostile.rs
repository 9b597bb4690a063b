//! Documents made to harm: each gets a message, changes nothing and runs nothing.

use crate::answers::type_feed_drive;
use crate::page::{Page, on_the_page};
use anyhow::Result;
use serde_json::{Value, json};

/// Drops a file on the page: its name, and a piece of JavaScript that makes its content.
async fn drop_file(page: &Page, name: &str, content: &str) -> Result<()> {
    let script = format!(
        r#"
        const given = new DataTransfer();
        given.items.add(new File([{content}], arguments[0]));
        document.body.dispatchEvent(new DragEvent("drop", {{ dataTransfer: given, bubbles: true, cancelable: true }}));
    "#
    );
    page.run(&script, vec![json!(name)]).await?;
    Ok(())
}

/// Names of files, what makes their content, and what the message must contain.
const REFUSED: [(&str, &str, &str); 11] = [
    ("empty", "''", "no JSON"),
    ("truncated", r#"'{"format": "stayband-project/1", "loop": {"contr'"#, "cut off"),
    ("of another kind", r#"'{"format": "something-else/3", "knob": "K"}'"#, "no Stayband project"),
    ("without a format", r#"'{"loop": {"controller": "K", "plant": "1/s"}, "knob": "K"}'"#, "format"),
    ("of the future", r#"'{"format": "stayband-project/2", "machine": {}, "loop": {"blocks": []}}'"#, "version 2"),
    ("a list", "'[1, 2, 3]'", "no JSON object"),
    ("100 MB", "new Uint8Array(100_000_000).fill(32)", "100 MB"),
    (
        "a million brackets",
        r#"'{"format": "stayband-project/1", "title": ' + '['.repeat(900_000) + ']'.repeat(900_000) + '}'"#,
        "no project that can be read",
    ),
    (
        "nested in a field",
        r#"'{"format": "stayband-project/1", "title": ' + '['.repeat(5000) + ']'.repeat(5000) + '}'"#,
        "not opened",
    ),
    (
        "numbers for texts",
        r#"'{"format": "stayband-project/1", "loop": {"controller": 1e999, "plant": 2}, "knob": 3}'"#,
        "not opened",
    ),
    ("bytes at random", "Uint8Array.from({ length: 5000 }, (_, index) => (index * 7919) % 256)", "no JSON"),
];

#[test]
fn a_document_that_is_no_project_gets_a_message_and_changes_nothing() {
    on_the_page(|page| async move {
        type_feed_drive(&page).await?;
        let before = page.run("return window.stayband.project()", vec![]).await?;
        for (name, content, reason) in REFUSED {
            page.run("document.getElementById('message-close').click()", vec![]).await?;
            drop_file(&page, name, content).await?;
            page.shows("message", name).await?;
            page.shows("message", "nothing was changed").await?;
            page.shows("message", reason).await?;
            let after = page.run("return window.stayband.project()", vec![]).await?;
            assert_eq!(after, before, "{name} changed the project");
        }
        // The page goes on.
        page.type_into("Setting", "12").await?;
        page.shows("answer-setting", "12").await
    });
}

#[test]
fn numbers_beyond_measure_get_a_message_at_their_field() {
    on_the_page(|page| async move {
        for number in ["1e999", "-1e999", "1e-999", "1e99999999999999999999", "9".repeat(3000).as_str()] {
            let project = json!({
                "format": "stayband-project/1",
                "loop": { "controller": "K", "plant": "a/(s (s + 1)(s + 2))" },
                "quantities": [{ "symbol": "a", "value": number }],
                "knob": "K",
                "setting": { "value": number, "minimum": number, "step": number, "factor": number },
                "requirements": [{ "kind": "damping-ratio", "limit": number }],
            });
            drop_file(&page, "numbers.json", &format!("{:?}", project.to_string())).await?;
            let said = r#"
                const opened = window.stayband.project().quantities[0]?.value === arguments[0];
                return opened && [...document.querySelectorAll(".problem")].some((one) => one.checkVisibility() && one.innerText !== "");
            "#;
            page.until(&format!("{number:.30} is found wrong"), said, vec![json!(number)]).await?;
        }
        type_feed_drive(&page).await
    });
}

/// A text that would run a script, load a picture or change the page, if it were taken for HTML.
const MARKUP: &str =
    r#""><img src=x onerror="window.harmed = 1"><script>window.harmed = 2</script><style>*{display:none}</style>"#;

/// Every text of a project replaced by markup, but those that say what kind of thing it is.
fn with_markup(value: &Value) -> Value {
    match value {
        Value::String(text) if text.is_empty() => json!(MARKUP),
        Value::String(text) => json!(format!("{text}{MARKUP}")),
        Value::Array(items) => items.iter().map(with_markup).collect(),
        Value::Object(fields) => {
            let kept = |name: &str| ["format", "kind", "direction", "feedback", "symbol", "knob"].contains(&name);
            let changed = |(name, value): (&String, &Value)| {
                (name.clone(), if kept(name) { value.clone() } else { with_markup(value) })
            };
            Value::Object(fields.iter().map(changed).collect())
        }
        other => other.clone(),
    }
}

#[test]
fn markup_in_every_text_is_shown_and_not_run() {
    on_the_page(|page| async move {
        let project = json!({
            "format": "stayband-project/1",
            "title": "a",
            "loop": { "controller": "K", "plant": "1/(s (0.1 s + 1)(0.02 s + 1))", "sensor": "1", "feedback": "negative" },
            "quantities": [{ "symbol": "a", "value": "1", "unit": "V", "meaning": "m" }],
            "knob": "K",
            "setting": { "value": "20", "name": "n", "unit": "V" },
            "requirements": [{ "kind": "damping-ratio", "limit": "0.3" }],
        });
        // Once where only notes carry markup, so that there is an answer that shows them, and once everywhere.
        let mut notes = project.clone();
        for path in ["/title", "/setting/name", "/setting/unit", "/quantities/0/unit", "/quantities/0/meaning"] {
            *notes.pointer_mut(path).expect("a note") = json!(MARKUP);
        }
        for (document, place) in [(notes, "answer"), (with_markup(&project), "plant-problem")] {
            let elements = "return document.querySelectorAll('img, script, style').length";
            let before = page.run(elements, vec![]).await?;
            drop_file(&page, "markup.json", &format!("{:?}", document.to_string())).await?;
            let opened = "return window.stayband.project().title.includes('onerror')";
            page.until("the document is opened", opened, vec![]).await?;
            page.until(
                "something is said",
                "return document.getElementById(arguments[0]).innerText !== ''",
                vec![json!(place)],
            )
            .await?;
            page.run("document.getElementById('projects-open').click()", vec![]).await?;
            page.shows("projects-heading", "Projects").await?;
            page.run("document.getElementById('projects-close').click()", vec![]).await?;
            assert_eq!(page.run(elements, vec![]).await?, before, "markup became elements");
            assert_eq!(page.run("return window.harmed ?? null", vec![]).await?, Value::Null, "a script ran");
        }
        Ok(())
    });
}
