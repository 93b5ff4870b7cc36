//! The small named world of the stories: a fresh data folder, a clock that stands where the story sets it, and
//! people who come through the router.

#![allow(dead_code)]

pub mod aged;
pub mod batches;
pub mod samples;
pub mod trends;
pub mod world;

use std::path::PathBuf;
use std::sync::atomic::{AtomicI64, AtomicU64, Ordering};
use std::sync::{Arc, LazyLock, Mutex};

use axum::body::Body;
use axum::http::{Request, Response, header};
use chrono::{DateTime, Utc};
use scraper::{Html, Selector};
use supernate::acts;
use supernate::acts::secret::{HashCost, Secrets};
use supernate::domain::account::NewPerson;
use supernate::domain::actor::Actor;
use supernate::domain::digest::hex;
use supernate::domain::moment::Moment;
use supernate::domain::pull::PullFacts;
use supernate::domain::role::Role;
use supernate::store;
use supernate::store::door::{Db, Durability};
use supernate::store::open_pull::{Line, Show};
use supernate::store::pull::Pull;
use supernate::store::site::Site;
use supernate::web::app::App;
use supernate::web::serve::router;
use tower::ServiceExt;

pub const PASSWORD: &str = "quiet mill pond herons";
pub const ORIGIN: &str = "http://127.0.0.1:8351";

/// The people of every story.
pub const PEOPLE: [(&str, &str, &[Role]); 11] = [
    ("nell.farrow", "Nell Farrow", &[Role::Administrator]),
    ("tomas.reyle", "Tomas Reyle", &[Role::Formulator]),
    ("bea.skelton", "Bea Skelton", &[Role::ProductionOperator]),
    ("rafe.tolland", "Rafe Tolland", &[Role::Analyst]),
    ("ilse.brandt", "Ilse Brandt", &[Role::Analyst]),
    ("maren.oddy", "Maren Oddy", &[Role::LabManager]),
    ("otis.vane", "Otis Vane", &[Role::LabManager]),
    ("ada.whitlock", "Ada Whitlock", &[Role::QaReviewer]),
    ("per.lindqvist", "Per Lindqvist", &[Role::QaReviewer]),
    ("ines.caro", "Ines Caro", &[Role::Auditor]),
    ("lena.marsh", "Lena Marsh", &[Role::Formulator]),
];

static COUNT: AtomicU64 = AtomicU64::new(0);

/// A folder that is removed when dropped.
pub struct Scratch(pub PathBuf);

impl Scratch {
    pub fn new() -> Scratch {
        let number = COUNT.fetch_add(1, Ordering::SeqCst);
        let path = std::env::temp_dir().join(format!("supernate-story-{}-{number}", std::process::id()));
        std::fs::create_dir_all(path.join("files")).unwrap();
        Scratch(path)
    }
}

impl Drop for Scratch {
    fn drop(&mut self) {
        let _ = std::fs::remove_dir_all(&self.0);
    }
}

/// A data folder with the site and its people, made once and copied for each story.
static TEMPLATE: LazyLock<Vec<u8>> = LazyLock::new(|| {
    let folder = Scratch::new();
    let path = folder.0.join("supernate.sqlite");
    let at = Moment::new(start(), chrono_tz::Europe::London);
    let console = Actor::console(at);
    let db = Db::open(&path, &console, Durability::Off).unwrap();
    let site = Site {
        name: "Tarnwick Suspension Works".to_string(),
        zone: chrono_tz::Europe::London,
        is_demo: true,
    };
    acts::site::set_up(&db, &console, &site).unwrap();
    for (user_name, full_name, roles) in PEOPLE {
        let new = NewPerson {
            user_name: user_name.to_string(),
            full_name: full_name.to_string(),
            identity_verified_by: "invented person".to_string(),
            roles: roles.to_vec(),
        };
        acts::account::create_demo_person(&db, &secrets(), &console, &new, PASSWORD).unwrap();
    }
    db.settle().unwrap();
    drop(db);
    std::fs::read(path).unwrap()
});

/// A folder with the site and its people, nobody has open.
pub fn fresh_folder() -> Scratch {
    let folder = Scratch::new();
    std::fs::write(folder.0.join("supernate.sqlite"), &*TEMPLATE).unwrap();
    folder
}

/// Stories begin here unless they set the clock.
pub fn start() -> DateTime<Utc> {
    "2026-12-01T09:00:00Z".parse().unwrap()
}

fn secrets() -> Secrets {
    Secrets { cost: HashCost::Demo, key: [42; 32] }
}

/// The laboratory of a story.
pub struct Lab {
    pub folder: Scratch,
    pub app: Arc<App>,
    pub router: axum::Router,
    clock: Arc<AtomicI64>,
    runtime: tokio::runtime::Runtime,
    sessions: Mutex<Vec<(String, String)>>,
}

/// Whatever a story did: the derived rows of the lists say what the records of each open pull say.
impl Drop for Lab {
    fn drop(&mut self) {
        if std::thread::panicking() {
            return;
        }
        let today = self.now().date();
        let pairs = self.app.db.read(|reader| {
            let mut pairs = Vec::new();
            for show in [Show::ToTake, Show::InTest] {
                for pull in store::open_pull::list(reader, show, today, None, 10_000)? {
                    pairs.push((store::pull::get(reader, pull.pull)?, pull));
                }
            }
            Ok(pairs)
        });
        for (record, listed) in pairs.unwrap_or_default() {
            same(&record, &listed);
        }
    }
}

/// A line of a list says what the records of its pull say.
pub fn same(record: &Pull, listed: &Line) {
    let facts = PullFacts { started_on: None, is_last: false, ..record.facts };
    assert_eq!(facts, listed.facts, "{}", record.number);
    assert_eq!(
        (record.id, record.study, record.minutes, record.test_within_days),
        (listed.pull, listed.study, listed.minutes, listed.test_within_days)
    );
    assert_eq!(
        (record.containers_taken, record.containers_left, &record.assigned_name),
        (listed.containers_taken, listed.containers_left, &listed.assigned_name)
    );
    let words = [&record.lot_number, &record.product_words, &record.container_word, &record.study_number];
    let listed_words =
        [listed.lot_number(), listed.product_words(), listed.container_word(), listed.study_number()];
    assert_eq!(words, listed_words);
    assert_eq!(format!("{}, {}", record.condition_name, record.orientation), listed.condition());
    assert_eq!(record.chamber_code.as_deref().unwrap_or_default(), listed.chamber_code());
    assert_eq!((record.age_text.as_str(), record.number.as_str()), (listed.age_text(), listed.number()));
    assert_eq!(hex(&record.uuid), listed.uuid());
}

impl Lab {
    pub fn new() -> Lab {
        let folder = Scratch::new();
        let path = folder.0.join("supernate.sqlite");
        std::fs::write(&path, &*TEMPLATE).unwrap();
        Lab::over(folder)
    }

    /// The laboratory closes; its folder stays.
    pub fn into_folder(mut self) -> Scratch {
        std::mem::replace(&mut self.folder, Scratch(PathBuf::new()))
    }

    /// A laboratory over a folder that exists.
    pub fn over(folder: Scratch) -> Lab {
        let path = folder.0.join("supernate.sqlite");
        let clock = Arc::new(AtomicI64::new(start().timestamp_millis()));
        let at = Moment::new(start(), chrono_tz::Europe::London);
        let db = Db::open(&path, &Actor::console(at), Durability::Off).unwrap();
        let site = db.read(store::site::get).unwrap().unwrap();
        let hand = Arc::clone(&clock);
        let app = Arc::new(App {
            db,
            secrets: secrets(),
            site,
            clock: Arc::new(move || DateTime::from_timestamp_millis(hand.load(Ordering::SeqCst)).unwrap()),
            guard: None,
            folder: folder.0.clone(),
            public_origin: ORIGIN.to_string(),
            demo_people: Vec::new(),
        });
        let router = router(Arc::clone(&app));
        let runtime =
            tokio::runtime::Builder::new_multi_thread().worker_threads(2).enable_all().build().unwrap();
        Lab { folder, app, router, clock, runtime, sessions: Mutex::new(Vec::new()) }
    }

    pub fn now(&self) -> Moment {
        self.app.now()
    }

    /// Sets the clock: `2026-12-01T09:00:00Z`.
    pub fn clock(&self, utc: &str) {
        let at: DateTime<Utc> = utc.parse().unwrap();
        self.clock.store(at.timestamp_millis(), Ordering::SeqCst);
    }

    pub fn later_minutes(&self, minutes: i64) {
        self.clock.fetch_add(minutes * 60_000, Ordering::SeqCst);
    }

    pub fn later_days(&self, days: i64) {
        self.later_minutes(days * 24 * 60);
    }

    /// A person of the laboratory for direct acts, at the clock's moment.
    pub fn actor(&self, user_name: &str) -> Actor {
        let account =
            self.app.db.read(|reader| store::account::by_user_name(reader, user_name)).unwrap().unwrap();
        acts::sign_in::actor_of(&account, self.now(), "storystory", None)
    }

    pub fn person(&self, user_name: &str) -> Person<'_> {
        Person { lab: self, user_name: user_name.to_string() }
    }

    pub fn administrator(&self) -> Person<'_> {
        self.person("nell.farrow")
    }

    pub fn formulator(&self) -> Person<'_> {
        self.person("tomas.reyle")
    }

    pub fn operator(&self) -> Person<'_> {
        self.person("bea.skelton")
    }

    pub fn analyst(&self) -> Person<'_> {
        self.person("rafe.tolland")
    }

    pub fn second_analyst(&self) -> Person<'_> {
        self.person("ilse.brandt")
    }

    pub fn manager(&self) -> Person<'_> {
        self.person("maren.oddy")
    }

    pub fn reviewer(&self) -> Person<'_> {
        self.person("ada.whitlock")
    }

    pub fn auditor(&self) -> Person<'_> {
        self.person("ines.caro")
    }

    /// One request through the router.
    pub fn send(&self, request: Request<Body>) -> Seen {
        let router = self.router.clone();
        self.runtime.block_on(async move {
            let response = router.oneshot(request).await.unwrap();
            Seen::read(response).await
        })
    }

    fn session(&self, user_name: &str) -> String {
        let known = self.sessions.lock().unwrap().iter().find(|(name, _)| name == user_name).cloned();
        if let Some((_, token)) = known {
            let alive = self.get_with("/me", Some(&token));
            if alive.status == 200 {
                return token;
            }
            self.sessions.lock().unwrap().retain(|(name, _)| name != user_name);
        }
        let body = form_body(&[("user_name", user_name), ("password", PASSWORD), ("next", "")]);
        let seen = self.send(post_request("/sign-in", body, None));
        assert_eq!(seen.status, 303, "sign-in of {user_name}: {}", seen.text());
        let token = seen.session_cookie().expect("a session cookie");
        self.sessions.lock().unwrap().push((user_name.to_string(), token.clone()));
        token
    }

    pub fn get_with(&self, path: &str, token: Option<&str>) -> Seen {
        let mut builder = Request::builder().uri(path);
        if let Some(token) = token {
            builder = builder.header(header::COOKIE, format!("__Host-sid={token}"));
        }
        self.send(builder.body(Body::empty()).unwrap())
    }
}

/// `a=1&b=2`, encoded.
pub fn form_body<K: AsRef<str>, V: AsRef<str>>(fields: &[(K, V)]) -> String {
    let encode = supernate::web::pairs::encoded;
    let pairs: Vec<String> = fields
        .iter()
        .map(|(name, value)| format!("{}={}", encode(name.as_ref()), encode(value.as_ref())))
        .collect();
    pairs.join("&")
}

pub fn post_request(path: &str, body: String, token: Option<&str>) -> Request<Body> {
    let mut builder = Request::builder()
        .method("POST")
        .uri(path)
        .header("sec-fetch-site", "same-origin")
        .header(header::CONTENT_TYPE, "application/x-www-form-urlencoded");
    if let Some(token) = token {
        builder = builder.header(header::COOKIE, format!("__Host-sid={token}"));
    }
    builder.body(Body::from(body)).unwrap()
}

/// A person who acts through pages.
pub struct Person<'a> {
    pub lab: &'a Lab,
    pub user_name: String,
}

impl Person<'_> {
    pub fn token(&self) -> String {
        self.lab.session(&self.user_name)
    }

    pub fn actor(&self) -> Actor {
        self.lab.actor(&self.user_name)
    }

    pub fn get(&self, path: &str) -> Seen {
        self.lab.get_with(path, Some(&self.token()))
    }

    /// Opens a page and asserts that it shows these words.
    pub fn sees(&self, path: &str, words: &str) -> Seen {
        let seen = self.get(path);
        assert_eq!(seen.status, 200, "{path}: {}", seen.text());
        assert!(seen.text().contains(words), "{path} does not show “{words}”:\n{}", seen.text());
        seen
    }

    /// Fills the form of a page (the one whose action is `action`) and sends it. What the form holds already is
    /// sent along; `fields` replace or add.
    pub fn submits(&self, page: &str, action: &str, fields: &[(&str, &str)]) -> Seen {
        let seen = self.get(page);
        assert_eq!(seen.status, 200, "{page}: {}", seen.text());
        let mut pairs = seen.form(action);
        for (name, value) in fields {
            pairs.retain(|(known, _)| known != name);
            pairs.push((name.to_string(), value.to_string()));
        }
        self.posts(action, &pairs)
    }

    /// Submits, asserts success (303) and answers with the page it leads to.
    pub fn does(&self, page: &str, action: &str, fields: &[(&str, &str)]) -> Seen {
        let seen = self.submits(page, action, fields);
        assert_eq!(seen.status, 303, "{action}: {}", seen.text());
        let to = seen.location.clone().unwrap();
        let mut landed = self.get(&to);
        landed.location = Some(to);
        landed
    }

    /// The same with the signing fields filled in.
    pub fn signs(&self, page: &str, action: &str, fields: &[(&str, &str)]) -> Seen {
        let mut all = fields.to_vec();
        all.push(("user_name", &self.user_name));
        all.push(("password", PASSWORD));
        self.does(page, action, &all)
    }

    pub fn posts<K: AsRef<str>, V: AsRef<str>>(&self, path: &str, fields: &[(K, V)]) -> Seen {
        self.lab.send(post_request(path, form_body(fields), Some(&self.token())))
    }
}

/// An answer as a person sees it.
pub struct Seen {
    pub status: u16,
    pub location: Option<String>,
    pub headers: axum::http::HeaderMap,
    pub body: Vec<u8>,
}

impl Seen {
    async fn read(response: Response<Body>) -> Seen {
        let (parts, body) = response.into_parts();
        let body = axum::body::to_bytes(body, 64 * 1024 * 1024).await.unwrap().to_vec();
        let location = parts.headers.get(header::LOCATION).map(|value| value.to_str().unwrap().to_string());
        Seen { status: parts.status.as_u16(), location, headers: parts.headers, body }
    }

    pub fn html(&self) -> String {
        String::from_utf8_lossy(&self.body).into_owned()
    }

    /// The words of the page's main part, white space folded.
    pub fn text(&self) -> String {
        let page = Html::parse_document(&self.html());
        let main = Selector::parse("main").unwrap();
        let words: Vec<&str> = match page.select(&main).next() {
            Some(main) => main.text().collect(),
            None => page.root_element().text().collect(),
        };
        words.join(" ").split_whitespace().collect::<Vec<_>>().join(" ")
    }

    pub fn title(&self) -> String {
        let page = Html::parse_document(&self.html());
        let title = Selector::parse("title").unwrap();
        page.select(&title).next().map(|title| title.text().collect::<String>()).unwrap_or_default()
    }

    /// The (name, value) pairs that the form with this action would send as it stands.
    pub fn form(&self, action: &str) -> Vec<(String, String)> {
        let page = Html::parse_document(&self.html());
        let forms = Selector::parse("form").unwrap();
        let of_action = || page.select(&forms).filter(|form| form.value().attr("action") == Some(action));
        let form = of_action()
            .find(|form| form.value().attr("method") == Some("post"))
            .or_else(|| of_action().next())
            .unwrap_or_else(|| panic!("no form with action {action}:\n{}", self.text()));
        let fields = Selector::parse("input[name], textarea[name], select[name]").unwrap();
        let option = Selector::parse("option[selected]").unwrap();
        let mut pairs = Vec::new();
        for field in form.select(&fields) {
            let element = field.value();
            let name = element.attr("name").unwrap().to_string();
            let kind = element.attr("type").unwrap_or("text");
            let value = match element.name() {
                "textarea" => field.text().collect::<String>(),
                "select" => field
                    .select(&option)
                    .next()
                    .and_then(|option| option.value().attr("value"))
                    .unwrap_or_default()
                    .to_string(),
                _ => element.attr("value").unwrap_or_default().to_string(),
            };
            if (kind == "radio" || kind == "checkbox") && element.attr("checked").is_none() {
                continue;
            }
            if kind == "file" {
                continue;
            }
            pairs.push((name, value));
        }
        pairs
    }

    /// The addresses of the links of the page's main part.
    pub fn links(&self) -> Vec<String> {
        let page = Html::parse_document(&self.html());
        let links = Selector::parse("main a[href]").unwrap();
        page.select(&links).filter_map(|link| link.value().attr("href").map(str::to_string)).collect()
    }

    pub fn session_cookie(&self) -> Option<String> {
        self.headers.get_all(header::SET_COOKIE).iter().find_map(|cookie| {
            let text = cookie.to_str().ok()?;
            let value = text.strip_prefix("__Host-sid=")?;
            Some(value.split(';').next()?.to_string()).filter(|token| !token.is_empty())
        })
    }
}
