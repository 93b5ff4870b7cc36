//! The one chromedriver that all tests of this binary share; it ends with the last browser.

use std::io::{BufRead, BufReader};
use std::process::{Child, Command, Stdio};
use std::sync::{Arc, LazyLock, Mutex, Weak};

/// A running chromedriver.
pub struct Driver {
    child: Child,
    pub port: u16,
}

/// Waits for answers of the driver, for all tests.
pub static RUNTIME: LazyLock<tokio::runtime::Runtime> = LazyLock::new(|| {
    tokio::runtime::Builder::new_multi_thread().worker_threads(2).enable_all().build().unwrap()
});

static SHARED: Mutex<Weak<Driver>> = Mutex::new(Weak::new());

impl Driver {
    /// The running driver, or a new one.
    pub fn shared() -> Arc<Driver> {
        let mut shared = SHARED.lock().unwrap_or_else(|poisoned| poisoned.into_inner());
        if let Some(running) = shared.upgrade() {
            return running;
        }
        let started = Arc::new(Driver::start());
        *shared = Arc::downgrade(&started);
        started
    }

    fn start() -> Driver {
        let mut child = Command::new("chromedriver")
            .arg("--port=0")
            .stdin(Stdio::null())
            .stdout(Stdio::piped())
            .stderr(Stdio::null())
            .spawn()
            .expect("chromedriver: run tests/run, which installs it or says what to install");
        let mut lines = BufReader::new(child.stdout.take().unwrap()).lines();
        let port = lines
            .by_ref()
            .map_while(Result::ok)
            .find_map(|line| {
                line.split_once("started successfully on port ")?.1.trim_end_matches('.').parse().ok()
            })
            .expect("chromedriver tells its port");
        // Its output is read to the end, so that it never waits for a reader.
        std::thread::spawn(move || lines.map_while(Result::ok).for_each(drop));
        Driver { child, port }
    }
}

impl Drop for Driver {
    fn drop(&mut self) {
        let _ = self.child.kill();
        let _ = self.child.wait();
    }
}
