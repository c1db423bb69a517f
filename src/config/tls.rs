//! Certificate and key for TLS.

use std::{path::Path, sync::Arc};

use tokio_rustls::rustls::{
    ServerConfig,
    crypto::ring,
    pki_types::{CertificateDer, PrivateKeyDer, pem::PemObject},
};

/// Reads a chain of certificates and the key of the first of them.
///
/// # Errors
/// Every fault of either file, or that they do not belong together.
pub(super) fn load(chain: &Path, key: &Path) -> Result<Arc<ServerConfig>, Vec<String>> {
    let certificates = CertificateDer::pem_file_iter(chain)
        .and_then(Iterator::collect::<Result<Vec<_>, _>>)
        .map_err(|error| format!("--tls-cert {} cannot be read ({error}).", chain.display()))
        .and_then(|found| {
            if found.is_empty() {
                Err(format!(
                    "--tls-cert {} holds no certificate; it must be PEM (-----BEGIN CERTIFICATE-----).",
                    chain.display()
                ))
            } else {
                Ok(found)
            }
        });
    let private = PrivateKeyDer::from_pem_file(key).map_err(|error| {
        format!(
            "--tls-key {} holds no private key ({error}); it must be PEM, PKCS#8, PKCS#1 or SEC1, not encrypted.",
            key.display()
        )
    });
    let (certificates, private) = match (certificates, private) {
        (Ok(certificates), Ok(private)) => (certificates, private),
        (certificates, private) => {
            return Err([certificates.err(), private.err()]
                .into_iter()
                .flatten()
                .collect());
        }
    };
    let mut config = ServerConfig::builder_with_provider(Arc::new(ring::default_provider()))
        .with_safe_default_protocol_versions()
        .and_then(|builder| {
            builder
                .with_no_client_auth()
                .with_single_cert(certificates, private)
        })
        .map_err(|error| {
            vec![format!(
                "--tls-cert {} and --tls-key {} cannot be used together ({error}).",
                chain.display(),
                key.display()
            )]
        })?;
    config.alpn_protocols = vec![b"http/1.1".to_vec()];
    Ok(Arc::new(config))
}
