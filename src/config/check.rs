//! The settings as written, read and compared.

use std::{fmt::Display, net::SocketAddr, str::FromStr, sync::Arc, time::Duration};

use clap::ValueEnum;
use tokio_rustls::rustls::ServerConfig;

use crate::question::FEWEST_TRIALS;

use super::{Config, LogForm, Settings, Tokens, settings::Access, tls};

impl Settings {
    /// Reads and compares all settings.
    ///
    /// # Errors
    /// Every fault found, each a sentence that names the flag and what would be right.
    pub fn check(&self) -> Result<Config, Vec<String>> {
        let mut faults = Vec::new();
        let config = Config {
            listen: read(
                &mut faults,
                "listen",
                &self.access.listen,
                "an IP address and a port such as 127.0.0.1:7410 or [::1]:7410",
            )
            .unwrap_or(SocketAddr::from(([127, 0, 0, 1], 7410))),
            open: read(&mut faults, "open", &self.access.open, "true or false").unwrap_or(true),
            tokens: self.access.tokens.as_deref().and_then(|file| {
                Tokens::load(file)
                    .map_err(|found| faults.extend(found))
                    .ok()
            }),
            tls: self.access.tls(&mut faults),
            cors_origins: self.access.cors_origin.clone(),
            frames: self.content.frames.clone(),
            log: LogForm::from_str(&self.content.log, false).unwrap_or_else(|_| {
                faults.push(format!(
                    "--log is {:?}; it must be text, json or off.",
                    self.content.log
                ));
                LogForm::Off
            }),
            max_body: size(&mut faults, "max-body", &self.limits.max_body),
            max_row: size(&mut faults, "max-row", &self.limits.max_row),
            max_batch: size(&mut faults, "max-batch", &self.limits.max_batch),
            buffer: size(&mut faults, "buffer", &self.limits.buffer),
            max_connections: count(&mut faults, "max-connections", &self.limits.max_connections),
            max_concurrent: count(&mut faults, "max-concurrent", &self.limits.max_concurrent),
            max_steps: count(&mut faults, "max-steps", &self.limits.max_steps),
            max_trials: count(&mut faults, "max-trials", &self.limits.max_trials),
            max_points: count(&mut faults, "max-points", &self.limits.max_points),
            request_timeout: time(&mut faults, "request-timeout", &self.limits.request_timeout),
            idle_timeout: time(&mut faults, "idle-timeout", &self.limits.idle_timeout),
            grace: read::<humantime::Duration>(&mut faults, "grace", &self.limits.grace, TIME)
                .map_or(Duration::ZERO, Into::into),
        };
        if config.max_trials < FEWEST_TRIALS {
            faults.push(format!(
                "--max-trials is {}; fewer than {FEWEST_TRIALS} settle no interval.",
                config.max_trials
            ));
        }
        if config.tokens.is_some() && config.open {
            faults.push(
                "--open answers anyone and --tokens only who shows a token; leave one of them out."
                    .to_owned(),
            );
        }
        // A file of tokens that cannot be read has been named already.
        if self.access.tokens.is_none() {
            faults.extend(config.exposed(config.listen));
        }
        faults.extend(self.access.cors_origin.iter().filter(|origin| !is_origin(origin)).map(|origin| {
            format!("--cors-origin is {origin:?}; it must be one origin by name, scheme://host or scheme://host:port, without a path or *.")
        }));
        if faults.is_empty() {
            Ok(config)
        } else {
            Err(faults)
        }
    }
}

impl Config {
    /// What is wrong with listening on an address, if anything is.
    pub fn exposed(&self, address: SocketAddr) -> Option<String> {
        let guarded = address.ip().is_loopback() || self.tokens.is_some() || self.open;
        (!guarded).then(|| {
            format!(
                "--listen {address} can be reached from other machines, and nothing would ask them who they are. \
                 Listen on 127.0.0.1, name who may ask with --tokens FILE, or add --open to answer anyone."
            )
        })
    }
}

impl Access {
    fn tls(&self, faults: &mut Vec<String>) -> Option<Arc<ServerConfig>> {
        let found = match (&self.tls_cert, &self.tls_key) {
            (Some(chain), Some(key)) => tls::load(chain, key),
            (None, None) => return None,
            (Some(_), None) => Err(vec![
                "--tls-cert is given without --tls-key; TLS needs both.".to_owned(),
            ]),
            (None, Some(_)) => Err(vec![
                "--tls-key is given without --tls-cert; TLS needs both.".to_owned(),
            ]),
        };
        found.map_err(|found| faults.extend(found)).ok()
    }
}

const TIME: &str = "a time such as 500ms, 30s or 2min";

fn read<T: FromStr>(
    faults: &mut Vec<String>,
    flag: &str,
    text: &str,
    right: impl Display,
) -> Option<T> {
    let value = text.parse().ok();
    if value.is_none() {
        faults.push(format!("--{flag} is {text:?}; it must be {right}."));
    }
    value
}

fn count(faults: &mut Vec<String>, flag: &str, text: &str) -> usize {
    read::<std::num::NonZeroUsize>(faults, flag, text, "a whole number from 1")
        .map_or(1, Into::into)
}

fn size(faults: &mut Vec<String>, flag: &str, text: &str) -> usize {
    let right = "a size such as 64KiB or 1MiB";
    let size = read::<bytesize::ByteSize>(faults, flag, text, right);
    size.map_or(0, |size| {
        usize::try_from(size.as_u64()).unwrap_or(usize::MAX)
    })
}

fn time(faults: &mut Vec<String>, flag: &str, text: &str) -> Duration {
    let time = read::<humantime::Duration>(faults, flag, text, TIME).map(Duration::from);
    if time == Some(Duration::ZERO) {
        faults.push(format!(
            "--{flag} is {text:?}; it must be longer than nothing."
        ));
    }
    time.unwrap_or(Duration::ZERO)
}

/// Whether the text is an origin as browsers write it (RFC 6454 §6.2): lower case, no path.
fn is_origin(text: &str) -> bool {
    let Ok(uri) = text.parse::<hyper::Uri>() else {
        return false;
    };
    let (Some(scheme), Some(authority)) = (uri.scheme_str(), uri.authority()) else {
        return false;
    };
    // A path, even the empty one that Uri adds, is not part of an origin.
    text == format!("{scheme}://{authority}")
        && !text.contains(['@', '*'])
        && text == text.to_lowercase()
}
