//! The page is closed: nothing gets out. A listener on this machine counts who knocks.

use crate::page::on_the_page;
use anyhow::Result;
use serde_json::{Value, json};
use std::io::Read;
use std::net::TcpListener;
use std::sync::Arc;
use std::sync::atomic::{AtomicUsize, Ordering};
use std::thread;
use thirtyfour::WebDriver;

/// Tries the ways in which a script reaches another machine, then waits for what may still be on its way.
const TRY_TO_CONNECT: &str = r#"
    const [host, done] = arguments;
    const address = `http://${host}/`;
    const refused = [];
    document.addEventListener("securitypolicyviolation", (event) => refused.push(event.effectiveDirective));
    const outcome = (promise) => promise.then(() => "reached", () => "refused");
    const element = (name, attributes) => document.body.append(Object.assign(document.createElement(name), attributes));
    const requested = () => new Promise((resolve, reject) => {
        const request = new XMLHttpRequest();
        request.onload = resolve;
        request.onerror = reject;
        request.open("GET", `${address}request`);
        request.send();
    });
    const inWorker = () => new Promise((resolve, reject) => {
        const source = `fetch("${address}worker").then(() => postMessage("reached"), () => postMessage("refused"))`;
        const worker = new Worker(URL.createObjectURL(new Blob([source])));
        worker.onmessage = ({ data }) => (data === "reached" ? resolve() : reject());
        worker.onerror = reject;
    });
    (async () => {
        const tried = {
            fetch: await outcome(fetch(`${address}fetch`)),
            request: await outcome(requested()),
            worker: await outcome(inWorker()),
        };
        try { new WebSocket(`ws://${host}/socket`); } catch { /* refused at once */ }
        try { new EventSource(`${address}events`); } catch { /* refused at once */ }
        navigator.sendBeacon(`${address}beacon`, "x");
        new Image().src = `${address}picture.png`;
        element("script", { src: `${address}script.js` });
        element("link", { rel: "stylesheet", href: `${address}style.css` });
        element("video", { src: `${address}film`, preload: "auto" });
        element("script", { textContent: "window.intruder = true" });
        await new Promise((resolve) => setTimeout(resolve, 1000));
        done({ ...tried, refused: [...new Set(refused)].sort(), intruder: window.intruder === true });
    })();
"#;

/// Puts a frame of another address into the page and waits for what comes of it.
const TRY_A_FRAME: &str = r#"
    const [host, done] = arguments;
    const refused = [];
    document.addEventListener("securitypolicyviolation", (event) => refused.push(event.effectiveDirective));
    document.body.append(Object.assign(document.createElement("iframe"), { src: `http://${host}/frame` }));
    setTimeout(() => done(refused), 1000);
"#;

/// A listener on a free port of this machine.
struct Listener {
    host: String,
    /// Connections made to it.
    connections: Arc<AtomicUsize>,
    /// Connections on which something was said.
    requests: Arc<AtomicUsize>,
}

impl Listener {
    /// Listens until the test program ends.
    fn start() -> Result<Self> {
        let listener = TcpListener::bind("127.0.0.1:0")?;
        let host = listener.local_addr()?.to_string();
        let (connections, requests) = (Arc::new(AtomicUsize::new(0)), Arc::new(AtomicUsize::new(0)));
        let (connected, said) = (Arc::clone(&connections), Arc::clone(&requests));
        thread::spawn(move || {
            for mut stream in listener.incoming().filter_map(Result::ok) {
                connected.fetch_add(1, Ordering::SeqCst);
                let said = Arc::clone(&said);
                thread::spawn(move || {
                    if stream.read(&mut [0; 1]).is_ok_and(|length| length > 0) {
                        said.fetch_add(1, Ordering::SeqCst);
                    }
                });
            }
        });
        Ok(Self { host, connections, requests })
    }

    fn connections(&self) -> usize {
        self.connections.load(Ordering::SeqCst)
    }

    fn requests(&self) -> usize {
        self.requests.load(Ordering::SeqCst)
    }
}

async fn try_to_connect(driver: &WebDriver, host: &str) -> Result<Value> {
    Ok(driver.execute_async(TRY_TO_CONNECT, vec![json!(host)]).await?.json().clone())
}

#[test]
fn no_connection_is_possible_and_no_foreign_script_runs() {
    on_the_page(|page| async move {
        let listener = Listener::start()?;
        let tried = try_to_connect(&page.driver, &listener.host).await?;
        assert_eq!(listener.connections(), 0, "connections were made: {tried:#}");
        assert_eq!(tried["intruder"], false);
        for way in ["fetch", "request", "worker"] {
            assert_eq!(tried[way], "refused", "{way}");
        }
        let refused: Vec<&str> = tried["refused"].as_array().into_iter().flatten().filter_map(Value::as_str).collect();
        for directive in ["connect-src", "img-src", "media-src", "script-src-elem", "style-src-elem"] {
            assert!(refused.contains(&directive), "{directive} is not among {refused:?}");
        }
        Ok(())
    });
}

/// Chromium opens a bare connection for the address of a frame before it looks at the policy, so here it counts what
/// was said on a connection, not the connection.
#[test]
fn no_frame_of_another_address_is_asked_for() {
    on_the_page(|page| async move {
        let listener = Listener::start()?;
        let refused = page.run_async(TRY_A_FRAME, vec![json!(listener.host)]).await?;
        assert_eq!(refused, json!(["frame-src"]));
        assert_eq!(listener.requests(), 0);
        Ok(())
    });
}

#[test]
fn the_same_tries_do_connect_from_a_page_without_our_policy() {
    on_the_page(|page| async move {
        let listener = Listener::start()?;
        let open = page.downloads.join("open.html");
        std::fs::write(&open, "<!doctype html><title>No policy</title><body></body>")?;
        page.driver.goto(&format!("file://{}", open.display())).await?;
        let tried = try_to_connect(&page.driver, &listener.host).await?;
        let heard = listener.requests();
        assert!(heard > 5, "the listener hears {heard}, so the other test shows nothing: {tried:#}");
        assert_eq!(tried["intruder"], true);
        page.run_async(TRY_A_FRAME, vec![json!(listener.host)]).await?;
        assert!(listener.requests() > heard, "the frame is not heard");
        Ok(())
    });
}

#[test]
fn using_the_page_breaks_no_rule_of_its_own_policy() {
    on_the_page(|page| async move {
        let listen = r#"
            window.refused = [];
            document.addEventListener("securitypolicyviolation", (event) =>
                window.refused.push(`${event.effectiveDirective}: ${event.sample}`));
        "#;
        page.run(listen, vec![]).await?;
        crate::answers::type_feed_drive(&page).await?;
        page.type_into("Setting", "30").await?;
        page.shows("answer-setting", "30").await?;
        assert_eq!(page.run("return window.refused", vec![]).await?, json!([]));
        Ok(())
    });
}
