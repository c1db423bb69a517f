//! What of an answer waits for its client: a body that ends properly only when it is told to.

use std::{
    io,
    pin::Pin,
    sync::{
        Arc,
        atomic::{AtomicUsize, Ordering},
    },
    task::{Context, Poll, ready},
};

use axum::http::HeaderMap;
use bytes::Bytes;
use hyper::body::Frame;
use tokio::sync::{Notify, mpsc};

/// Whoever writes the answer.
pub(super) struct Unread {
    parts: mpsc::UnboundedSender<Part>,
    shared: Arc<Shared>,
    most: usize,
}

/// The answer as the connection reads it.
pub(super) struct Answer {
    parts: mpsc::UnboundedReceiver<Part>,
    shared: Arc<Shared>,
    whole: bool,
    /// Whether it broke off, and the connection was asked to send what came before.
    broken: bool,
}

enum Part {
    Bytes(Bytes),
    /// The proper end, with trailers if there are any.
    End(HeaderMap),
}

#[derive(Default)]
struct Shared {
    bytes: AtomicUsize,
    fewer: Notify,
}

/// An answer of which up to `most` bytes, and a block more, may wait.
pub(super) fn channel(most: usize) -> (Unread, Answer) {
    let (sender, receiver) = mpsc::unbounded_channel();
    let shared = Arc::<Shared>::default();
    let answer = Answer {
        parts: receiver,
        shared: shared.clone(),
        whole: false,
        broken: false,
    };
    let unread = Unread {
        parts: sender,
        shared,
        most,
    };
    (unread, answer)
}

impl Unread {
    /// Adds bytes; whether anyone is still there to read them.
    pub(super) fn send(&self, bytes: Bytes) -> bool {
        self.shared.bytes.fetch_add(bytes.len(), Ordering::Relaxed);
        self.parts.send(Part::Bytes(bytes)).is_ok()
    }

    /// Ends the answer properly. Dropped without that, it is cut.
    pub(super) fn end(self, trailers: HeaderMap) {
        let _ = self.parts.send(Part::End(trailers));
    }

    /// Whether as much waits as may.
    pub(super) fn is_full(&self) -> bool {
        self.shared.bytes.load(Ordering::Relaxed) >= self.most
    }

    /// Whether half as much waits, or more.
    pub(super) fn is_half_full(&self) -> bool {
        self.shared.bytes.load(Ordering::Relaxed) >= self.most / 2
    }

    /// Waits until some of it was read.
    pub(super) async fn fewer(&self) {
        self.shared.fewer.notified().await;
    }

    /// Waits until the client is gone.
    pub(super) async fn gone(&self) {
        self.parts.closed().await;
    }
}

impl hyper::body::Body for Answer {
    type Data = Bytes;
    type Error = io::Error;

    fn poll_frame(
        mut self: Pin<&mut Self>,
        cx: &mut Context<'_>,
    ) -> Poll<Option<io::Result<Frame<Bytes>>>> {
        if self.whole {
            return Poll::Ready(None);
        }
        Poll::Ready(match ready!(self.parts.poll_recv(cx)) {
            Some(Part::Bytes(bytes)) => {
                self.shared.bytes.fetch_sub(bytes.len(), Ordering::Relaxed);
                self.shared.fewer.notify_one();
                Some(Ok(Frame::data(bytes)))
            }
            Some(Part::End(trailers)) => {
                self.whole = true;
                (!trailers.is_empty()).then(|| Ok(Frame::trailers(trailers)))
            }
            // What came before, the last word too, is sent on before the error is looked at.
            None if !self.broken => {
                self.broken = true;
                cx.waker().wake_by_ref();
                return Poll::Pending;
            }
            // An error cuts the connection, so that nobody takes the answer for whole.
            None => Some(Err(io::Error::other("the series broke off"))),
        })
    }
}
