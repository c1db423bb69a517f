//! Bearer tokens (RFC 6750): who may ask.
//!
//! A token is 32 random bytes in hex, so that a plain hash protects it: there is nothing to guess.
//! The file holds a line `NAME sha256:HEX` for each; empty lines and lines after `#` are skipped.

use std::{fmt, fs, path::Path, sync::Arc};

use sha2::{Digest, Sha256};
use subtle::ConstantTimeEq;

const HASH: &str = "sha256:";
const RIGHT: &str = "it must be NAME sha256:HEX, as `lodeframe token NAME` prints it";

/// The tokens that are accepted, hashed.
#[derive(Clone)]
pub struct Tokens(Vec<Token>);

#[derive(Clone)]
struct Token {
    name: Arc<str>,
    hash: [u8; 32],
}

impl Tokens {
    /// Reads a file of tokens.
    ///
    /// # Errors
    /// Every fault, with its line.
    pub(super) fn load(file: &Path) -> Result<Tokens, Vec<String>> {
        let text = fs::read_to_string(file).map_err(|error| {
            vec![format!(
                "--tokens {} cannot be read ({error}).",
                file.display()
            )]
        })?;
        Tokens::parse(&text).map_err(|faults| {
            let named = faults.into_iter();
            named
                .map(|fault| format!("--tokens {}: {fault}", file.display()))
                .collect()
        })
    }

    /// Reads the text of such a file.
    ///
    /// # Errors
    /// Every fault, with its line.
    pub fn parse(text: &str) -> Result<Tokens, Vec<String>> {
        let mut tokens: Vec<Token> = Vec::new();
        let mut faults = Vec::new();
        for (number, line) in (1..).zip(text.lines()) {
            let line = line.trim();
            if line.is_empty() || line.starts_with('#') {
                continue;
            }
            // The line is not quoted: someone may have put the token itself there.
            let Some(token) = Token::read(line) else {
                faults.push(format!("line {number} is no hashed token; {RIGHT}."));
                continue;
            };
            if tokens.iter().any(|known| known.name == token.name) {
                faults.push(format!("line {number} names {} again.", token.name));
            }
            tokens.push(token);
        }
        if tokens.is_empty() && faults.is_empty() {
            faults.push("there is no token in it, so nobody could ask.".to_owned());
        }
        if faults.is_empty() {
            Ok(Tokens(tokens))
        } else {
            Err(faults)
        }
    }

    /// Whose token this is. Takes the same time whichever matches, and however much of it does.
    pub fn holder(&self, token: &[u8]) -> Option<Arc<str>> {
        let hash: [u8; 32] = Sha256::digest(token).into();
        let mut holder = None;
        for known in &self.0 {
            if bool::from(known.hash.ct_eq(&hash)) {
                holder = Some(&known.name);
            }
        }
        holder.cloned()
    }

    /// Makes a token: the secret, and the line that stands for it in the file.
    ///
    /// # Errors
    /// When the name cannot stand in such a line, or the system gives no random bytes.
    pub fn make(name: &str) -> Result<(String, String), String> {
        if !is_name(name) {
            return Err(format!(
                "{name:?} cannot name a token; use 1 to 64 letters, digits, dots, hyphens or underscores."
            ));
        }
        let mut bytes = [0; 32];
        getrandom::fill(&mut bytes)
            .map_err(|error| format!("the system gives no random bytes: {error}"))?;
        let secret = hex::encode(bytes);
        let line = format!("{name} {HASH}{}", hex::encode(Sha256::digest(&secret)));
        Ok((secret, line))
    }
}

impl Token {
    fn read(line: &str) -> Option<Token> {
        let (name, hash) = line.split_once(char::is_whitespace)?;
        let mut bytes = [0; 32];
        hex::decode_to_slice(hash.trim_start().strip_prefix(HASH)?, &mut bytes).ok()?;
        is_name(name).then(|| Token {
            name: name.into(),
            hash: bytes,
        })
    }
}

/// A name that cannot upset a line of the file or of the log.
fn is_name(text: &str) -> bool {
    let allowed = |byte: u8| byte.is_ascii_alphanumeric() || b"._-".contains(&byte);
    (1..=64).contains(&text.len()) && text.bytes().all(allowed)
}

impl fmt::Debug for Tokens {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.debug_list()
            .entries(self.0.iter().map(|token| &token.name))
            .finish()
    }
}
