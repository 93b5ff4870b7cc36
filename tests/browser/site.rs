//! A real Supernate on a free port of this machine, over the folder and the clock of a story.

use super::support::Lab;

/// The served laboratory; it stops being served when dropped.
pub struct Site {
    pub lab: Lab,
    pub origin: String,
    serving: Option<tokio::runtime::Runtime>,
}

impl Site {
    pub fn new() -> Site {
        Site::serving(Lab::new())
    }

    pub fn serving(lab: Lab) -> Site {
        let runtime =
            tokio::runtime::Builder::new_multi_thread().worker_threads(2).enable_all().build().unwrap();
        let router = lab.router.clone();
        let listener = runtime.block_on(tokio::net::TcpListener::bind("127.0.0.1:0")).unwrap();
        let origin = format!("http://{}", listener.local_addr().unwrap());
        runtime.spawn(async move { axum::serve(listener, router).await });
        Site { lab, origin, serving: Some(runtime) }
    }
}

impl Drop for Site {
    fn drop(&mut self) {
        if let Some(runtime) = self.serving.take() {
            runtime.shutdown_background();
        }
    }
}
