//! The listening socket: one passed on by systemd, or one of our own.

use std::{io, net::TcpListener};

use listenfd::ListenFd;

use crate::config::Config;

/// File descriptors beside those of connections: standard streams, the runtime, files read at start.
const OWN_FILES: u64 = 64;

/// The socket to serve.
///
/// A socket that systemd passes on (`LISTEN_FDS`) goes before `--listen`: it stays open while the
/// service is started anew, so that connections wait instead of being refused.
///
/// # Errors
/// A sentence that says what is wrong and how to mend it.
pub fn listener(config: &Config) -> Result<TcpListener, String> {
    let mut passed = ListenFd::from_env();
    let listener = match passed.len() {
        0 => TcpListener::bind(config.listen).map_err(|error| {
            format!(
                "{} cannot be listened on ({error}); choose another with --listen",
                config.listen
            )
        })?,
        1 => passed
            .take_tcp_listener(0)
            .map_err(|error| format!("the socket passed on by systemd is not one to listen on with TCP ({error}); use ListenStream="))?
            .ok_or("the socket passed on by systemd was taken already")?,
        more => return Err(format!("systemd passed on {more} sockets; the service listens on one, so keep one ListenStream=")),
    };
    let address = listener.local_addr().map_err(|error| error.to_string())?;
    if let Some(fault) = config.exposed(address) {
        return Err(fault);
    }
    listener
        .set_nonblocking(true)
        .map_err(|error| error.to_string())?;
    Ok(listener)
}

/// Asks for as many file descriptors as there may be connections, and says how many there may be.
///
/// # Errors
/// The system allows fewer than needed.
pub fn room(config: &Config) -> io::Result<()> {
    let wanted = config.max_connections as u64 + OWN_FILES;
    let got = rlimit::increase_nofile_limit(wanted)?;
    if got < wanted {
        return Err(io::Error::other(format!(
            "the system allows {got} open files, --max-connections {} needs {wanted}; raise LimitNOFILE= or ulimit -n, or allow fewer connections",
            config.max_connections
        )));
    }
    Ok(())
}
