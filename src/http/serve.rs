//! Connections: from a listening socket to the router, and the graceful end.

use std::{io, time::Duration};

use axum::Router;
use hyper::server::conn::http1;
use hyper_util::{
    rt::{TokioIo, TokioTimer},
    server::graceful::GracefulShutdown,
    service::TowerToHyperService,
};
use tokio::net::TcpListener;

use super::log;
use crate::config::Config;

/// Serves `app` on `listener` until `stop` is done, then lets running requests finish.
///
/// Connections that are still busy after `config.grace` are cut.
pub async fn serve(
    listener: TcpListener,
    app: Router,
    config: &Config,
    stop: impl Future<Output = ()>,
) {
    let mut http = http1::Builder::new();
    http.timer(TokioTimer::new())
        .header_read_timeout(config.idle_timeout);
    let connections = GracefulShutdown::new();
    let mut stop = std::pin::pin!(stop);
    loop {
        let accepted = tokio::select! {
            accepted = listener.accept() => accepted,
            () = &mut stop => break,
        };
        let stream = match accepted {
            Ok((stream, _)) => stream,
            Err(error) => {
                pause_after(&error).await;
                continue;
            }
        };
        // Answers are small and complete; waiting to fill a segment only delays them. A socket
        // that refuses the option is about to fail anyway, and says so when it is read.
        let _ = stream.set_nodelay(true);
        let connection =
            http.serve_connection(TokioIo::new(stream), TowerToHyperService::new(app.clone()));
        let connection = connections.watch(connection);
        tokio::spawn(async move {
            if let Err(error) = connection.await {
                log::event("debug", "connection ended early", &error);
            }
        });
    }
    drop(listener);
    if tokio::time::timeout(config.grace, connections.shutdown())
        .await
        .is_err()
    {
        log::event(
            "warn",
            "stopped",
            &"requests still running at the end of the grace were cut",
        );
    }
}

/// A connection that failed before it was accepted is no reason to wait; having no more file
/// descriptors is, since trying again at once would only spin.
async fn pause_after(error: &io::Error) {
    use io::ErrorKind::{ConnectionAborted, ConnectionRefused, ConnectionReset};
    if !matches!(
        error.kind(),
        ConnectionAborted | ConnectionRefused | ConnectionReset
    ) {
        log::event("warn", "cannot accept connections", &error);
        tokio::time::sleep(Duration::from_millis(100)).await;
    }
}
