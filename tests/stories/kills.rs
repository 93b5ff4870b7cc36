//! The program is killed while people record; nothing acknowledged is lost and nothing is recorded twice.

use std::io::{Read, Write};
use std::net::{TcpListener, TcpStream};
use std::process::{Child, Command, Stdio};
use std::time::{Duration, Instant};

use supernate::domain::sample::Purpose;

use crate::support::samples::Bench;
use crate::support::{Lab, PASSWORD, Scratch, form_body};

const ENTRIES: usize = 100;
const KILLS: usize = 5;

/// The program as a process of its own, on a free port.
struct Server {
    child: Child,
    port: u16,
}

impl Server {
    fn start(folder: &Scratch) -> Server {
        let port = TcpListener::bind("127.0.0.1:0").unwrap().local_addr().unwrap().port();
        let listen = format!("127.0.0.1:{port}");
        let child = Command::new(env!("CARGO_BIN_EXE_supernate"))
            .args(["serve", "--data", folder.0.to_str().unwrap(), "--listen", &listen])
            .stdout(Stdio::null())
            .stderr(Stdio::null())
            .spawn()
            .unwrap();
        let deadline = Instant::now() + Duration::from_secs(30);
        while TcpStream::connect(&listen).is_err() {
            assert!(Instant::now() < deadline, "the program did not start");
            std::thread::sleep(Duration::from_millis(20));
        }
        Server { child, port }
    }

    /// SIGKILL: no goodbye.
    fn kill(&mut self) {
        self.child.kill().unwrap();
        self.child.wait().unwrap();
    }
}

impl Drop for Server {
    fn drop(&mut self) {
        let _ = self.child.kill();
        let _ = self.child.wait();
    }
}

/// One box of a test: its page and its name.
#[derive(Clone)]
struct Place {
    test: i64,
    label: String,
    name: String,
}

/// A signed-in analyst at a port.
struct Visitor {
    port: u16,
    cookie: String,
    form_token: String,
}

impl Visitor {
    fn sign_in(port: u16) -> Visitor {
        let body = form_body(&[("user_name", "rafe.tolland"), ("password", PASSWORD), ("next", "")]);
        let (status, answer) = send(port, "POST", "/sign-in", "", &body).expect("an answer to sign-in");
        assert_eq!(status, 303, "{answer}");
        let line = answer.lines().find_map(|line| line.strip_prefix("set-cookie: __Host-sid=")).unwrap();
        let cookie = format!("__Host-sid={}", line.split(';').next().unwrap());
        let (_, page) = send(port, "GET", "/me", &cookie, "").expect("a page with a form");
        let start = page.find("name=\"form_token\" value=\"").expect("a form token") + 25;
        let form_token = page[start..].split('"').next().unwrap().to_string();
        Visitor { port, cookie, form_token }
    }

    /// Records one reading under its own submission key; whether it was acknowledged.
    fn records(&self, number: usize, place: &Place) -> bool {
        let body = form_body(&[
            ("form_token", self.form_token.as_str()),
            ("submission", &format!("reading-{number:04}-of-this-story")),
            ("version", "0"),
            ("label", &place.label),
            (&place.name, "100.1"),
        ]);
        let path = format!("/tests/{}", place.test);
        send(self.port, "POST", &path, &self.cookie, &body).is_some_and(|(status, _)| status == 303)
    }
}

/// One request; `None` where the answer did not come.
fn send(port: u16, method: &str, path: &str, cookie: &str, body: &str) -> Option<(u16, String)> {
    let mut stream = TcpStream::connect(("127.0.0.1", port)).ok()?;
    stream.set_read_timeout(Some(Duration::from_secs(10))).ok()?;
    let head = format!(
        "{method} {path} HTTP/1.1\r\nhost: 127.0.0.1:{port}\r\nconnection: close\r\nsec-fetch-site: same-origin\r\n\
         cookie: {cookie}\r\ncontent-type: application/x-www-form-urlencoded\r\ncontent-length: {}\r\n\r\n{body}",
        body.len()
    );
    stream.write_all(head.as_bytes()).ok()?;
    let mut answer = String::new();
    stream.read_to_string(&mut answer).ok()?;
    let status = answer.split_whitespace().nth(1)?.parse().ok()?;
    Some((status, answer))
}

/// A folder with twenty-five samples of two tests of two replicates, and its hundred boxes.
///
/// Made at the computer's own time, because the program as a process of its own has no other clock.
fn folder_with_boxes() -> (Scratch, Vec<Place>) {
    let lab = Lab::new();
    lab.clock(&chrono::Utc::now().to_rfc3339());
    let bench = Bench::new(&lab);
    let lot = bench.lot("TW-104-0700");
    let mut places = Vec::new();
    for _ in 0..ENTRIES / 4 {
        let sample = bench.receives(lot, Purpose::Release, &["assay", "density"]);
        let found = bench.sample(sample);
        for test in &found.tests {
            for slot in found.slots(test) {
                let name = slot.key.name();
                places.push(Place { test: test.id, label: found.number.clone(), name });
            }
        }
    }
    lab.app.db.settle().unwrap();
    (lab.into_folder(), places)
}

/// Fault test F1 in small: kill -9 while 100 readings are posted, restart, post them all again.
#[test]
fn killed_while_recording_nothing_acknowledged_is_lost_and_nothing_is_double() {
    let (folder, places) = folder_with_boxes();
    assert_eq!(places.len(), ENTRIES);
    let mut acknowledged = Vec::new();
    for round in 0..KILLS {
        let mut server = Server::start(&folder);
        let visitor = Visitor::sign_in(server.port);
        let share = ENTRIES / KILLS;
        let mine: Vec<(usize, Place)> =
            places.iter().cloned().enumerate().skip(round * share).take(share).collect();
        let poster = std::thread::spawn(move || {
            mine.iter().map(|(number, place)| visitor.records(*number, place)).collect::<Vec<_>>()
        });
        std::thread::sleep(Duration::from_millis(10 + 20 * round as u64));
        server.kill();
        acknowledged.extend(poster.join().unwrap());
    }
    assert!(acknowledged.iter().any(|done| !done), "no kill hit the work");
    let kept = recorded(&folder);
    for (place, _) in places.iter().zip(&acknowledged).filter(|(_, done)| **done) {
        let found = kept.iter().filter(|(test, name)| *test == place.test && *name == place.name).count();
        assert_eq!(found, 1, "{} of test {} was acknowledged", place.name, place.test);
    }
    let server = Server::start(&folder);
    let visitor = Visitor::sign_in(server.port);
    for (number, place) in places.iter().enumerate() {
        assert!(visitor.records(number, place), "reading {number} was not taken the second time");
    }
    drop(server);
    let mut all = recorded(&folder);
    all.sort();
    let mut expected: Vec<(i64, String)> =
        places.iter().map(|place| (place.test, place.name.clone())).collect();
    expected.sort();
    assert_eq!(all, expected);
    let verdict =
        Command::new(env!("CARGO_BIN_EXE_supernate")).arg("verify").arg(&folder.0).output().unwrap();
    assert!(verdict.status.success(), "{}", String::from_utf8_lossy(&verdict.stdout));
}

/// Test and box of every reading in the file.
fn recorded(folder: &Scratch) -> Vec<(i64, String)> {
    let file = rusqlite::Connection::open(folder.0.join("supernate.sqlite")).unwrap();
    let mut statement =
        file.prepare("select sample_test, 'reading.0.' || replicate || '.' || field from reading").unwrap();
    statement.query_map([], |row| Ok((row.get(0)?, row.get(1)?))).unwrap().map(Result::unwrap).collect()
}
