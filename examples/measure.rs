//! Measures the goals that a data set can show, and prints both sides of each with their ratio.
//!
//! `cargo run --release --example measure -- SMALL [LARGE]`, folders made by `make_data_set`. Entries are written into
//! the small folder: it is used up. Medians of alternating rounds; times are of this machine, ratios count.
//!
//! `measure -- steps FOLDER WHAT TIMES` does one thing so many times and nothing else, for counting instructions:
//! `examples/instructions.sh` takes the difference of two run lengths. WHAT is `counts`, `entry`, or a page's address.

use std::fs::File;
use std::io::{Seek, SeekFrom, Write};
use std::path::{Path, PathBuf};
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, AtomicU64, Ordering};
use std::time::{Duration, Instant};

use axum::body::Body;
use axum::http::{Request, header};
use chrono::{NaiveDate, Utc};
use supernate::cli::folder;
use supernate::domain::act::Act;
use supernate::domain::actor::Actor;
use supernate::domain::failure::Failure;
use supernate::domain::moment::Moment;
use supernate::domain::reason::Reason;
use supernate::store::door::{Db, Durability};
use supernate::store::open_pull::Counts;
use supernate::store::{self, Answer, Reader, bulk};
use supernate::web::app::App;
use supernate::web::serve::router;
use tower::ServiceExt;

const ROUNDS: usize = 9;
const ORIGIN: &str = "http://127.0.0.1:8351";
const PASSWORD: &str = "quiet mill pond herons";

fn main() -> Result<(), Failure> {
    let arguments: Vec<String> = std::env::args().skip(1).collect();
    if let [mode, path, what, times] = arguments.as_slice()
        && mode == "steps"
    {
        return steps(Path::new(path), what, times.parse().unwrap_or(1));
    }
    let folders: Vec<PathBuf> = arguments.iter().map(PathBuf::from).collect();
    let Some(small) = folders.first() else {
        return Err(Failure::Held("Name a data set, or a small and a large one.".to_string()));
    };
    let starts: Vec<f64> = folders.iter().map(|path| start_ms(path)).collect::<Result<_, _>>()?;
    told("G12 start, ms, at most 2 x", &starts);
    let weeks: Vec<f64> = folders.iter().map(|path| page_ms(path, "/week")).collect::<Result<_, _>>()?;
    told("G1 week page live, ms, at most 1.10 x", &weeks);
    for page in ["/review", "/checks", "/lots", "/sign-in"] {
        let sides: Vec<f64> = folders.iter().map(|path| page_ms(path, page)).collect::<Result<_, _>>()?;
        told(&format!("{page}, ms"), &sides);
    }
    let counts: Vec<f64> = folders.iter().map(|path| count_us(path)).collect::<Result<_, _>>()?;
    told("G3 counts by state, us, at most 1.2 x", &counts);
    println!("resident after these pages: {} MiB (G12: at most 64)", resident_mib());
    entries(small)
}

/// The large side over the small one, where both were named.
fn told(what: &str, sides: &[f64]) {
    match sides {
        [small, large] => println!("{what}: small {small:.3}, large {large:.3}, ratio {:.2}", large / small),
        [small] => println!("{what}: {small:.3}"),
        _ => {}
    }
}

fn median(mut times: Vec<f64>) -> f64 {
    times.sort_by(f64::total_cmp);
    times.get(times.len() / 2).copied().unwrap_or_default()
}

fn timed<T>(body: impl FnOnce() -> Result<T, Failure>) -> Result<f64, Failure> {
    let began = Instant::now();
    body()?;
    Ok(began.elapsed().as_secs_f64() * 1e3)
}

fn rounds(mut body: impl FnMut() -> Result<f64, Failure>) -> Result<f64, Failure> {
    Ok(median((0..ROUNDS).map(|_| body()).collect::<Result<_, _>>()?))
}

fn start_ms(path: &Path) -> Result<f64, Failure> {
    rounds(|| timed(|| folder::open(path, Durability::Full)))
}

/// One thing, `times` times.
fn steps(path: &Path, what: &str, times: usize) -> Result<(), Failure> {
    match what {
        "counts" => {
            let opened = folder::open(path, Durability::Full)?;
            let today = Utc::now().date_naive();
            (0..times).try_for_each(|_| opened.db.read(|reader| counted(reader, today)).map(drop))
        }
        "entry" => {
            let opened = folder::open(path, Durability::Full)?;
            let entries = Entries::into(&opened.db)?;
            (0..times).try_for_each(|_| entries.one())
        }
        page => {
            let visitor = Visitor::of(path)?;
            (0..times).try_for_each(|_| visitor.opens(page).map(drop))
        }
    }
}

/// A signed-in person who opens pages through the router, in-process.
struct Visitor {
    router: axum::Router,
    runtime: tokio::runtime::Runtime,
    session: String,
}

impl Visitor {
    fn of(path: &Path) -> Result<Visitor, Failure> {
        let opened = folder::open(path, Durability::Full)?;
        let site = opened.site.clone().ok_or_else(|| Failure::missing("site"))?;
        let app = Arc::new(App {
            db: opened.db,
            secrets: opened.secrets,
            site,
            clock: Arc::new(Utc::now),
            guard: None,
            folder: path.to_path_buf(),
            public_origin: ORIGIN.to_string(),
            demo_people: Vec::new(),
        });
        let runtime = tokio::runtime::Builder::new_multi_thread().worker_threads(1).enable_all().build()?;
        let mut visitor = Visitor { router: router(app), runtime, session: String::new() };
        let sign_in = Request::post("/sign-in")
            .header("sec-fetch-site", "same-origin")
            .header(header::CONTENT_TYPE, "application/x-www-form-urlencoded")
            .body(Body::from(format!("user_name=maren.oddy&password={}&next=", PASSWORD.replace(' ', "+"))))
            .map_err(Failure::fault)?;
        let (signed_in, _) = visitor.sends(sign_in)?;
        let cookies =
            signed_in.headers.get_all(header::SET_COOKIE).iter().filter_map(|value| value.to_str().ok());
        let session =
            cookies.filter_map(|text| text.split(';').next()).find(|text| text.starts_with("__Host-sid="));
        visitor.session =
            session.ok_or_else(|| Failure::missing("session of the measuring person"))?.to_string();
        Ok(visitor)
    }

    fn sends(&self, request: Request<Body>) -> Result<(axum::http::response::Parts, usize), Failure> {
        let router = self.router.clone();
        self.runtime.block_on(async move {
            let response = router.oneshot(request).await.map_err(Failure::fault)?;
            let (parts, body) = response.into_parts();
            let size = axum::body::to_bytes(body, 64 << 20).await.map_err(Failure::fault)?.len();
            Ok((parts, size))
        })
    }

    /// Status and size of a page.
    fn opens(&self, page: &str) -> Result<(u16, usize), Failure> {
        let request = Request::get(page)
            .header(header::COOKIE, &self.session)
            .body(Body::empty())
            .map_err(Failure::fault)?;
        let (parts, size) = self.sends(request)?;
        Ok((parts.status.as_u16(), size))
    }
}

fn page_ms(path: &Path, page: &str) -> Result<f64, Failure> {
    let visitor = Visitor::of(path)?;
    let (status, size) = visitor.opens(page)?;
    println!("{page} of {}: status {status}, {size} bytes", path.display());
    rounds(|| timed(|| visitor.opens(page)))
}

/// The counts of the week page.
fn counted(reader: &Reader<'_>, today: NaiveDate) -> Answer<Counts> {
    store::open_pull::counts(reader, today)
}

fn count_us(path: &Path) -> Result<f64, Failure> {
    let opened = folder::open(path, Durability::Full)?;
    let today = Utc::now().date_naive();
    Ok(rounds(|| timed(|| opened.db.read(|reader| counted(reader, today))))? * 1e3)
}

/// Entries at the bench: three readings in one act.
struct Entries<'a> {
    db: &'a Db,
    test: i64,
    replicate: AtomicU64,
}

impl Entries<'_> {
    fn into(db: &Db) -> Result<Entries<'_>, Failure> {
        Ok(Entries { db, test: db.read(bulk::first_open_test)?, replicate: AtomicU64::new(1) })
    }

    fn one(&self) -> Result<(), Failure> {
        let actor = Actor::console(Moment::new(Utc::now(), chrono_tz::Europe::London));
        let first = self.replicate.fetch_add(3, Ordering::Relaxed) as i64;
        self.db.change(&actor, Act::RecordReadings, &Reason::none(), |change| {
            bulk::three_readings(change, self.test, first)
        })
    }
}

/// G4, G5 and G14 on one folder.
fn entries(path: &Path) -> Result<(), Failure> {
    let opened = folder::open(path, Durability::Full)?;
    let db = &opened.db;
    let made = Entries::into(db)?;
    let entry = || made.one();
    let mut file = File::create(path.join("bare-write"))?;
    let mut bare = || -> Result<(), Failure> {
        file.seek(SeekFrom::Start(0))?;
        file.write_all(&[7; 40 * 1024])?;
        Ok(file.sync_data()?)
    };
    let (mut entered, mut written) = (Vec::new(), Vec::new());
    for _ in 0..200 {
        entered.push(timed(entry)?);
        written.push(timed(&mut bare)?);
    }
    let (entered, written) = (median(entered), median(written));
    println!(
        "G4 entry of three readings {entered:.3} ms, bare write of 40 KiB with its sync {written:.3} ms, ratio {:.2} \
         (at most 2.5)",
        entered / written
    );
    readers(db, &entry)?;
    size(db, path, &entry)?;
    Ok(std::fs::remove_file(path.join("bare-write"))?)
}

/// The writer alone, then with eight readers that think 50 ms.
fn readers(db: &Db, entry: &(dyn Fn() -> Result<(), Failure> + Sync)) -> Result<(), Failure> {
    let many = || (0..200).map(|_| timed(entry)).collect::<Result<Vec<f64>, Failure>>().map(median);
    let alone = many()?;
    let (is_over, failed) = (AtomicBool::new(false), AtomicU64::new(0));
    let today = Utc::now().date_naive();
    let together = std::thread::scope(|scope| {
        for _ in 0..8 {
            scope.spawn(|| {
                while !is_over.load(Ordering::Relaxed) {
                    if db.read(|reader| counted(reader, today)).is_err() {
                        failed.fetch_add(1, Ordering::Relaxed);
                    }
                    std::thread::sleep(Duration::from_millis(50));
                }
            });
        }
        let together = many();
        is_over.store(true, Ordering::Relaxed);
        together
    })?;
    println!(
        "G5 writer alone {alone:.3} ms, with eight readers {together:.3} ms, ratio {:.2} (at most 1.3), {} reads failed",
        together / alone,
        failed.load(Ordering::Relaxed)
    );
    Ok(())
}

/// Bytes of the file for each reading row, with its trail line, act, seal and indexes.
fn size(db: &Db, path: &Path, entry: &dyn Fn() -> Result<(), Failure>) -> Result<(), Failure> {
    db.settle()?;
    let file = folder::database_of(path);
    let before = std::fs::metadata(&file)?.len();
    const ENTRIES: u64 = 2_000;
    for _ in 0..ENTRIES {
        entry()?;
    }
    db.settle()?;
    let grown = std::fs::metadata(&file)?.len() - before;
    println!("G14 {} bytes a reading row, all in (at most 400)", grown / (ENTRIES * 3));
    Ok(())
}

fn resident_mib() -> u64 {
    let status = std::fs::read_to_string("/proc/self/status").unwrap_or_default();
    let line = status.lines().find(|line| line.starts_with("VmRSS:")).unwrap_or_default();
    line.split_whitespace().nth(1).and_then(|text| text.parse::<u64>().ok()).unwrap_or_default() / 1024
}
