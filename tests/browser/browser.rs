//! One headless Chromium as a person uses it: open, fill by label, press by words, read the main part.

use std::path::PathBuf;
use std::sync::Arc;
use std::time::{Duration, Instant};

use axum::http::Method;
use fantoccini::elements::Element;
use fantoccini::wd::WebDriverCompatibleCommand;
use fantoccini::{Client, ClientBuilder, Locator};
use serde_json::{Value, json};

use super::driver::{Driver, RUNTIME};
use super::site::Site;
use super::support::{PASSWORD, Scratch};

/// How long words may take to appear.
const PATIENCE: Duration = Duration::from_secs(8);

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Script {
    On,
    Off,
}

pub struct Browser<'a> {
    pub site: &'a Site,
    client: Option<Client>,
    // Held so that the driver and the profile outlive the browser.
    _driver: Arc<Driver>,
    _profile: Scratch,
}

/// A command outside the standard: the driver's log and the browser's own protocol.
#[derive(Debug)]
struct Own {
    path: &'static str,
    body: Value,
}

impl WebDriverCompatibleCommand for Own {
    fn endpoint(&self, base: &url::Url, session: Option<&str>) -> Result<url::Url, url::ParseError> {
        base.join(&format!("session/{}/{}", session.unwrap_or_default(), self.path))
    }

    fn method_and_body(&self, _: &url::Url) -> (Method, Option<String>) {
        (Method::POST, Some(self.body.to_string()))
    }
}

impl<'a> Browser<'a> {
    pub fn new(site: &'a Site, script: Script) -> Browser<'a> {
        let driver = Driver::shared();
        let profile = Scratch::new();
        let Value::Object(wished) = wished(&profile, script) else { unreachable!() };
        let address = format!("http://127.0.0.1:{}", driver.port);
        let client = RUNTIME.block_on(async {
            let connector = hyper_util::client::legacy::connect::HttpConnector::new();
            ClientBuilder::new(connector).capabilities(wished).connect(&address).await
        });
        let client = client.expect("a Chromium session: run tests/run, which installs chromium");
        Browser { site, client: Some(client), _driver: driver, _profile: profile }
    }

    fn client(&self) -> &Client {
        self.client.as_ref().expect("the browser is open")
    }

    fn own(&self, path: &'static str, body: Value) -> Value {
        RUNTIME.block_on(self.client().issue_cmd(Own { path, body })).unwrap()
    }

    /// A command of the browser's own protocol.
    pub fn protocol(&self, command: &str, params: Value) -> Value {
        self.own("goog/cdp/execute", json!({ "cmd": command, "params": params }))
    }

    pub fn open(&self, path: &str) {
        RUNTIME.block_on(self.client().goto(&format!("{}{path}", self.site.origin))).unwrap();
    }

    pub fn path(&self) -> String {
        RUNTIME.block_on(self.client().current_url()).unwrap().path().to_string()
    }

    /// Whether the script module runs in the open page.
    pub fn has_module(&self) -> bool {
        self.find("//html[contains(@class, 'scripted')]").is_some()
    }

    fn find(&self, path: &str) -> Option<Element> {
        RUNTIME.block_on(self.client().find(Locator::XPath(path))).ok()
    }

    fn shown(&self, path: &str) -> Option<Element> {
        RUNTIME.block_on(async {
            let found = self.client().find_all(Locator::XPath(path)).await.ok()?;
            for element in found {
                if element.is_displayed().await.unwrap_or(false) {
                    return Some(element);
                }
            }
            None
        })
    }

    /// Waits for the element; where it does not come the failure shows the page.
    fn waits_for(&self, path: &str, what: &str) -> Element {
        let until = Instant::now() + PATIENCE;
        loop {
            if let Some(element) = self.shown(path) {
                return element;
            }
            assert!(Instant::now() < until, "{what} is not on {}:\n{}", self.path(), self.text());
            std::thread::sleep(Duration::from_millis(50));
        }
    }

    /// Presses the link, button, summary or choice with exactly these words.
    pub fn press(&self, words: &str) {
        let path = format!(
            "//*[self::a or self::button or self::summary or self::label][normalize-space(.)='{words}']"
        );
        let element = self.waits_for(&path, &format!("“{words}”"));
        RUNTIME.block_on(element.click()).unwrap();
    }

    /// Presses the main button of the page's form as the form stands; false where there is none.
    pub fn sends_main_form(&self) -> bool {
        let Some(button) = self.shown("//main//form//button[contains(@class, 'primary')]") else {
            return false;
        };
        self.awaits("document.documentElement.dataset.sent = 'yes'; arguments[0]();");
        RUNTIME.block_on(button.click()).unwrap();
        let until = Instant::now() + PATIENCE;
        while self.find("//html[@data-sent]").is_some() && Instant::now() < until {
            std::thread::sleep(Duration::from_millis(50));
        }
        true
    }

    /// Chooses a file of this machine in the field under this label.
    pub fn chooses(&self, label: &str, file: &std::path::Path) {
        let path = format!("//input[@type='file'][@id=//label[normalize-space(.)='{label}']/@for]");
        let element = self.waits_for(&path, &format!("the field “{label}”"));
        RUNTIME.block_on(element.send_keys(file.to_str().unwrap())).unwrap();
    }

    /// Presses, and waits until the page shows something else.
    pub fn presses_on(&self, words: &str) {
        let (path, before) = (self.path(), self.text());
        self.press(words);
        let until = Instant::now() + PATIENCE;
        while self.path() == path && self.text() == before {
            assert!(Instant::now() < until, "“{words}” led nowhere on {path}:\n{before}");
            std::thread::sleep(Duration::from_millis(50));
        }
    }

    /// Fills the field under this label, replacing what it holds; a select takes the option with these words.
    pub fn fill(&self, label: &str, value: &str) {
        let path = format!("//*[@id=//label[normalize-space(.)='{label}']/@for]");
        let element = self.waits_for(&path, &format!("the field “{label}”"));
        RUNTIME
            .block_on(async {
                if element.tag_name().await? == "select" {
                    return element.select_by_label(value).await;
                }
                element.clear().await?;
                element.send_keys(value).await
            })
            .unwrap();
    }

    fn types_over(&self, element: &Element, value: &str) {
        RUNTIME
            .block_on(async {
                element.clear().await?;
                element.send_keys(value).await
            })
            .unwrap();
    }

    /// Fills the box with this name.
    pub fn fills_named(&self, name: &str, value: &str) {
        let element = self.waits_for(&format!("//input[@name='{name}']"), &format!("the box {name}"));
        self.types_over(&element, value);
    }

    /// The names of the reading boxes with this ending.
    fn boxes(&self, ending: &str) -> Vec<String> {
        let found =
            RUNTIME.block_on(self.client().find_all(Locator::Css("input[name^='reading.']"))).unwrap();
        let name = |element: &Element| RUNTIME.block_on(element.attr("name")).ok().flatten();
        let names = found.iter().filter_map(name);
        names.filter(|name| name.ends_with(ending)).collect()
    }

    /// Fills every reading box with this ending.
    pub fn fills_boxes(&self, ending: &str, value: &str) {
        let boxes = self.boxes(ending);
        assert!(!boxes.is_empty(), "no box {ending} on {}:\n{}", self.path(), self.text());
        boxes.iter().for_each(|name| self.fills_named(name, value));
    }

    /// Fills the first reading box with this ending.
    pub fn fills_first_box(&self, ending: &str, value: &str) {
        let boxes = self.boxes(ending);
        assert!(!boxes.is_empty(), "no box {ending} on {}:\n{}", self.path(), self.text());
        self.fills_named(&boxes[0], value);
    }

    /// Types into what has the focus.
    pub fn types(&self, keys: &str) {
        RUNTIME.block_on(async { self.client().active_element().await?.send_keys(keys).await }).unwrap();
    }

    /// The words of the page's main part.
    pub fn text(&self) -> String {
        let element = self.find("//main").or_else(|| self.find("//body"));
        let text = element.map(|element| RUNTIME.block_on(element.text()).unwrap_or_default());
        text.unwrap_or_default().split_whitespace().collect::<Vec<_>>().join(" ")
    }

    /// Waits until the page shows these words.
    pub fn sees(&self, words: &str) {
        let until = Instant::now() + PATIENCE;
        while !self.text().contains(words) {
            assert!(Instant::now() < until, "{} does not show “{words}”:\n{}", self.path(), self.text());
            std::thread::sleep(Duration::from_millis(50));
        }
    }

    /// Signs in through the page.
    pub fn signs_in(&self, user_name: &str) {
        self.open("/sign-in");
        self.fill("User name", user_name);
        self.fill("Password", PASSWORD);
        self.press("Sign in");
        self.waits_for("//button[normalize-space(.)='Sign out']", "the button “Sign out”");
    }

    /// Takes over a session of the story, without the sign-in page.
    pub fn is(&self, user_name: &str) {
        let token = self.site.lab.person(user_name).token();
        self.protocol(
            "Network.setCookie",
            json!({ "name": "__Host-sid", "value": token, "url": self.site.origin, "path": "/",
                    "secure": true, "httpOnly": true, "sameSite": "Lax" }),
        );
    }

    /// The size of the window in CSS pixels.
    pub fn is_sized(&self, width: u32, height: u32) {
        self.protocol(
            "Emulation.setDeviceMetricsOverride",
            json!({ "width": width, "height": height, "deviceScaleFactor": 1, "mobile": false }),
        );
    }

    /// The theme that the person's system asks for: `light` or `dark`.
    pub fn prefers(&self, theme: &str) {
        self.protocol(
            "Emulation.setEmulatedMedia",
            json!({ "features": [{ "name": "prefers-color-scheme", "value": theme }] }),
        );
    }

    /// Runs a function body that calls back its last argument.
    pub fn awaits(&self, script: &str) -> Value {
        RUNTIME.block_on(self.client().execute_async(script, Vec::new())).unwrap()
    }

    /// What the console holds since it was last asked: errors and reports of the content security policy.
    /// That a form came back with 4xx is no error of the page.
    pub fn console_errors(&self) -> Vec<String> {
        let log = self.own("se/log", json!({ "type": "browser" }));
        let entries = log.as_array().cloned().unwrap_or_default();
        let is_error = |entry: &&Value| entry["level"] == "SEVERE" || entry["level"] == "WARNING";
        let messages = entries.iter().filter(is_error).map(|entry| entry["message"].to_string());
        messages.filter(|message| !message.contains("responded with a status of 4")).collect()
    }

    /// A picture of the whole page in `target/screenshots`, for people to look at.
    pub fn pictures(&self, name: &str) {
        let picture = self
            .protocol("Page.captureScreenshot", json!({ "format": "png", "captureBeyondViewport": true }));
        let folder = screenshots();
        std::fs::create_dir_all(&folder).unwrap();
        let bytes = from_base64(picture["data"].as_str().unwrap());
        std::fs::write(folder.join(format!("{name}.png")), bytes).unwrap();
    }

    /// The text of each printed sheet of the page.
    pub fn prints(&self) -> Vec<String> {
        let printed =
            self.protocol("Page.printToPDF", json!({ "preferCSSPageSize": true, "printBackground": false }));
        let folder = Scratch::new();
        let file = folder.0.join("page.pdf");
        std::fs::write(&file, from_base64(printed["data"].as_str().unwrap())).unwrap();
        let read = std::process::Command::new("pdftotext")
            .args(["-layout", file.to_str().unwrap(), "-"])
            .output()
            .expect("pdftotext: run tests/run, which installs it or says what to install");
        let text = String::from_utf8_lossy(&read.stdout).into_owned();
        text.split('\u{c}').filter(|sheet| !sheet.trim().is_empty()).map(str::to_string).collect()
    }
}

impl Drop for Browser<'_> {
    fn drop(&mut self) {
        if let Some(client) = self.client.take() {
            let _ = RUNTIME.block_on(client.close());
        }
    }
}

fn screenshots() -> PathBuf {
    PathBuf::from(env!("CARGO_TARGET_TMPDIR")).join("../screenshots")
}

fn wished(profile: &Scratch, script: Script) -> Value {
    let mut arguments: Vec<String> = [
        "--headless=new",
        "--no-sandbox",
        "--disable-gpu",
        "--disable-dev-shm-usage",
        "--disable-quic",
        "--no-first-run",
        "--disable-background-networking",
        "--disable-component-update",
        "--disable-sync",
        "--hide-scrollbars",
        "--window-size=1280,900",
    ]
    .map(str::to_string)
    .to_vec();
    arguments.push(format!("--user-data-dir={}", profile.0.join("profile").display()));
    let javascript = if script == Script::On { 1 } else { 2 };
    json!({
        "browserName": "chrome",
        "goog:loggingPrefs": { "browser": "ALL" },
        "goog:chromeOptions": {
            "args": arguments,
            "prefs": { "profile.managed_default_content_settings.javascript": javascript },
        },
    })
}

fn from_base64(text: &str) -> Vec<u8> {
    use base64::Engine;
    base64::engine::general_purpose::STANDARD.decode(text).unwrap()
}
