//! The program is killed while people record; nothing acknowledged is lost and nothing is recorded twice.

use std::io::{Read, Write};
use std::net::{TcpListener, TcpStream};
use std::process::{Child, Command, Stdio};
use std::time::{Duration, Instant};

use crate::support::{PASSWORD, Scratch, form_body, fresh_folder};

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

/// A signed-in person at a port.
#[derive(Clone)]
struct Visitor {
    port: u16,
    cookie: String,
    form_token: String,
}

impl Visitor {
    fn sign_in(port: u16) -> Visitor {
        let body = form_body(&[("user_name", "nell.farrow"), ("password", PASSWORD), ("next", "")]);
        let (status, answer) = send(port, "POST", "/sign-in", "", &body).expect("an answer to sign-in");
        assert_eq!(status, 303, "{answer}");
        let line = answer.lines().find_map(|line| line.strip_prefix("set-cookie: __Host-sid=")).unwrap();
        let cookie = format!("__Host-sid={}", line.split(';').next().unwrap());
        let (_, page) = send(port, "GET", "/settings/clock", &cookie, "").expect("the form");
        let start = page.find("name=\"form_token\" value=\"").expect("a form token") + 25;
        let form_token = page[start..].split('"').next().unwrap().to_string();
        Visitor { port, cookie, form_token }
    }

    /// Records one entry under its own submission key; whether it was acknowledged.
    fn records(&self, number: usize) -> bool {
        let body = form_body(&[
            ("form_token", self.form_token.as_str()),
            ("submission", &format!("entry-{number:04}-of-this-story")),
            ("reason", &format!("entry {number:04} of this story")),
        ]);
        send(self.port, "POST", "/settings/clock", &self.cookie, &body)
            .is_some_and(|(status, _)| status == 303)
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

/// Fault test F1 in small: kill -9 while 100 entries are posted, restart, post them all again.
#[test]
fn killed_while_recording_nothing_acknowledged_is_lost_and_nothing_is_double() {
    let folder = fresh_folder();
    let mut acknowledged = Vec::new();
    for round in 0..KILLS {
        let mut server = Server::start(&folder);
        let visitor = Visitor::sign_in(server.port);
        let share = ENTRIES / KILLS;
        let range = round * share..(round + 1) * share;
        let poster =
            std::thread::spawn(move || range.map(|number| visitor.records(number)).collect::<Vec<_>>());
        std::thread::sleep(Duration::from_millis(5 + 9 * round as u64));
        server.kill();
        acknowledged.extend(poster.join().unwrap());
    }
    assert!(acknowledged.iter().any(|done| !done), "no kill hit the work");
    let kept = reasons(&folder);
    for number in (0..ENTRIES).filter(|number| acknowledged[*number]) {
        assert!(
            kept.contains(&format!("entry {number:04} of this story")),
            "entry {number} was acknowledged, then lost"
        );
    }
    let server = Server::start(&folder);
    let visitor = Visitor::sign_in(server.port);
    for number in 0..ENTRIES {
        assert!(visitor.records(number), "entry {number} was not taken the second time");
    }
    drop(server);
    let mut all = reasons(&folder);
    all.sort();
    let expected: Vec<String> =
        (0..ENTRIES).map(|number| format!("entry {number:04} of this story")).collect();
    assert_eq!(all, expected);
    let verdict =
        Command::new(env!("CARGO_BIN_EXE_supernate")).arg("verify").arg(&folder.0).output().unwrap();
    assert!(verdict.status.success(), "{}", String::from_utf8_lossy(&verdict.stdout));
}

/// The reasons of all entries of this story that stand in the history.
fn reasons(folder: &Scratch) -> Vec<String> {
    let file = rusqlite::Connection::open(folder.0.join("supernate.sqlite")).unwrap();
    let mut statement = file.prepare("select reason from trail_act where act = 'ConfirmClock'").unwrap();
    statement.query_map([], |row| row.get(0)).unwrap().map(Result::unwrap).collect()
}
