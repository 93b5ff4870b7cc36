//! The server loop: header time-out, a limit of connections, and an orderly stop.

use std::net::SocketAddr;
use std::sync::Arc;
use std::time::Duration;

use hyper_util::rt::{TokioIo, TokioTimer};
use hyper_util::service::TowerToHyperService;
use tokio::net::TcpListener;
use tokio::sync::Semaphore;
use tower::ServiceExt;

use super::timed;
use crate::domain::failure::Failure;
use crate::web::app::App;
use crate::web::serve::{Client, router};

/// Headers have to arrive within this time (sec_S45).
const HEADER_TIMEOUT: Duration = Duration::from_secs(10);
/// Connections at a time.
const MOST_CONNECTIONS: usize = 512;
/// After a stop signal, requests in flight have this long to end.
const GRACE: Duration = Duration::from_secs(10);

/// Whether the address can be listened on: asked before long work that would be in vain.
pub fn is_free(address: SocketAddr) -> Result<(), Failure> {
    std::net::TcpListener::bind(address).map(|_| ()).map_err(|error| taken(address, &error))
}

fn taken(address: SocketAddr, error: &std::io::Error) -> Failure {
    Failure::Held(format!("The address {address} cannot be used: {error}. Choose another with --listen."))
}

/// Binds the address, tells it, and serves until Ctrl-C or a stop signal.
pub fn run(app: Arc<App>, address: SocketAddr, ready: impl FnOnce(SocketAddr)) -> Result<(), Failure> {
    let runtime = tokio::runtime::Builder::new_multi_thread().enable_all().build()?;
    runtime.block_on(async {
        let listener = TcpListener::bind(address).await.map_err(|error| taken(address, &error))?;
        ready(listener.local_addr()?);
        let timed = tokio::spawn(timed::work(Arc::clone(&app)));
        let served = accept(app, listener).await;
        timed.abort();
        served
    })
}

async fn accept(app: Arc<App>, listener: TcpListener) -> Result<(), Failure> {
    let router = router(app);
    let permits = Arc::new(Semaphore::new(MOST_CONNECTIONS));
    let stop = stop_signal();
    tokio::pin!(stop);
    loop {
        let permit = Arc::clone(&permits).acquire_owned().await.map_err(Failure::fault)?;
        let (stream, client) = tokio::select! {
            accepted = listener.accept() => match accepted {
                Ok(accepted) => accepted,
                Err(error) => { tracing::warn!(%error, "a connection was not accepted"); continue; }
            },
            () = &mut stop => break,
        };
        let service =
            router.clone().map_request(move |mut request: hyper::Request<hyper::body::Incoming>| {
                request.extensions_mut().insert(Client(client));
                request.map(axum::body::Body::new)
            });
        tokio::spawn(async move {
            let connection = hyper::server::conn::http1::Builder::new()
                .timer(TokioTimer::new())
                .header_read_timeout(HEADER_TIMEOUT)
                .serve_connection(TokioIo::new(stream), TowerToHyperService::new(service));
            if let Err(error) = connection.await {
                tracing::debug!(%error, "a connection ended early");
            }
            drop(permit);
        });
    }
    let _ = tokio::time::timeout(GRACE, permits.acquire_many(MOST_CONNECTIONS as u32)).await;
    Ok(())
}

async fn stop_signal() {
    let interrupted = tokio::signal::ctrl_c();
    match tokio::signal::unix::signal(tokio::signal::unix::SignalKind::terminate()) {
        Ok(mut terminated) => {
            tokio::select! {
                _ = interrupted => (),
                _ = terminated.recv() => (),
            }
        }
        Err(_) => {
            let _ = interrupted.await;
        }
    }
}
