//! Connections: from a listening socket to the router, and the graceful end.

use std::{io, pin::pin, sync::Arc, time::Duration};

use axum::Router;
use hyper::server::conn::http1;
use hyper_util::{
    rt::TokioIo,
    server::graceful::{GracefulShutdown, Watcher},
    service::TowerToHyperService,
};
use tokio::{
    io::{AsyncRead, AsyncWrite},
    net::{TcpListener, TcpStream},
    sync::{OwnedSemaphorePermit, Semaphore},
    time::timeout,
};
use tokio_io_timeout::TimeoutStream;
use tokio_rustls::TlsAcceptor;

use super::{AppState, doorstep::Doorstep, lazy_timer::LazyTimer, log, workers::Workers};

/// Most of a request that a connection holds unread, bytes: room for the largest head that is
/// answered with a problem, and no more, since every connection may fill it.
const READ_BUFFER: usize = 64 * 1024;

/// How long a series may take for its last word after the grace.
const LAST_WORD: Duration = Duration::from_secs(1);

/// Serves `app` on `listener` until `stop` is done, then lets running requests finish.
///
/// A series that still runs after `--grace` ends with a last word; what is busy even then is cut.
///
/// # Errors
/// The system gives no threads to answer on.
pub async fn serve(
    listener: TcpListener,
    app: Router,
    state: &AppState,
    stop: impl Future<Output = ()>,
) -> io::Result<()> {
    let workers = Workers::start()?;
    let config = &state.config;
    let mut http = http1::Builder::new();
    http.max_buf_size(READ_BUFFER)
        // To copy an answer behind its head costs less than to write from two places.
        .writev(false)
        .header_read_timeout(config.idle_timeout);
    let places = Arc::new(Semaphore::new(config.max_connections));
    let doorstep = Doorstep::new();
    let tls = config.tls.clone().map(TlsAcceptor::from);
    let connections = GracefulShutdown::new();
    let mut stop = pin!(stop);
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
        let Ok(permit) = places.clone().try_acquire_owned() else {
            state.metrics.connections_shed.inc();
            // A handshake is more work than a client without a place is worth.
            if tls.is_none() {
                doorstep.turn_away(stream, config.max_connections);
            }
            continue;
        };
        let place = Place::new(permit, state.clone());
        let (mut http, app, watcher) = (http.clone(), app.clone(), connections.watcher());
        http.timer(LazyTimer::default());
        let (tls, patience) = (tls.clone(), config.idle_timeout);
        let stream = stream.into_std();
        workers.spawn(async move {
            // Here, since a socket wakes the runtime in which it was made one of tokio's.
            let stream = match stream.and_then(TcpStream::from_std) {
                Ok(stream) => stream,
                Err(error) => return log::event("warn", "cannot use a connection", &error),
            };
            let Some(tls) = tls else {
                return converse(stream, http, app, watcher, place).await;
            };
            match timeout(patience, tls.accept(stream)).await {
                Ok(Ok(stream)) => converse(stream, http, app, watcher, place).await,
                Ok(Err(error)) => log::event("debug", "no TLS", &error),
                Err(_) => log::event("debug", "no TLS", &"the client did not go on"),
            }
        });
    }
    drop(listener);
    let mut done = pin!(connections.shutdown());
    if timeout(config.grace, &mut done).await.is_ok() {
        return Ok(());
    }
    // What still runs may be a series without an end: it says so to its client.
    state.ending.send_replace(true);
    if timeout(LAST_WORD, done).await.is_err() {
        log::event(
            "warn",
            "stopped",
            &"requests still running at the end of the grace were cut",
        );
    }
    Ok(())
}

/// The place of one connection, given back when it ends.
struct Place {
    state: AppState,
    _permit: OwnedSemaphorePermit,
}

impl Place {
    fn new(permit: OwnedSemaphorePermit, state: AppState) -> Place {
        state.metrics.connections.inc();
        Place {
            state,
            _permit: permit,
        }
    }
}

impl Drop for Place {
    fn drop(&mut self) {
        self.state.metrics.connections.dec();
    }
}

/// Answers the requests of one connection.
async fn converse(
    stream: impl AsyncRead + AsyncWrite + Unpin + Send + 'static,
    http: http1::Builder,
    app: Router,
    watcher: Watcher,
    place: Place,
) {
    let idle = place.state.config.idle_timeout;
    // A client that reads nothing is left after the idle time, whatever is still to be written: hyper
    // would wait for it without an end.
    let mut stream = TimeoutStream::new(stream);
    stream.set_write_timeout(Some(idle));
    let stream = TokioIo::new(Box::pin(stream));
    let connection = http.serve_connection(stream, TowerToHyperService::new(app));
    if let Err(error) = watcher.watch(connection).await {
        log::event("debug", "connection ended early", &error);
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
