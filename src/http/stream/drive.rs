//! Drives a series: reads while there is room, has blocks answered, sends them in order.

use std::{
    collections::VecDeque, future::poll_fn, panic::AssertUnwindSafe, pin::Pin, task::Poll,
    time::Duration,
};

use axum::{
    body::{Body, HttpBody},
    http::{HeaderMap, HeaderValue},
};
use bytes::Bytes;
use futures_util::FutureExt;
use http_body_util::BodyExt;
use tokio::{
    sync::{oneshot, watch},
    time::timeout,
};

use super::{Coding, TRAILERS, failure::Failure, packing::Packer, unread::Unread};
use crate::{
    http::{
        AppState,
        problem::{Problem, Source},
    },
    pool::Work,
    series::{BLOCK, Done, Intake, Job, Outlet, Refusal},
};

/// A job of no more than this is answered at once, where it is: a hand-over to another thread
/// would cost as much as the few rows themselves.
const SMALL: usize = 4 * 1024;
/// How long what still arrives is read and thrown away once the answer is complete, so that the
/// client comes to read it before the connection is closed.
const LINGER: Duration = Duration::from_secs(2);

/// One series under way.
pub(super) struct Drive {
    running: Running,
    /// Away only while the pool unpacks for it.
    intake: Option<Intake>,
    outlet: Outlet,
    body: Body,
    /// Whether the body has ended.
    all_arrived: bool,
    unread: Unread,
    /// Told once, how the answer begins.
    head: Option<oneshot::Sender<Result<(), Problem>>>,
    /// Blocks being answered, in order.
    working: VecDeque<Work<Done>>,
    /// Whether the service must come to its end.
    ending: watch::Receiver<bool>,
    packing: Packing,
}

/// How the answer is compressed.
enum Packing {
    Not,
    By(Packer),
    /// It broke, and no bytes can follow.
    Broken,
}

/// Counts the series among the requests that run, for as long as it does.
struct Running(AppState);

/// What happened next.
enum Event {
    Arrived(Option<Result<Bytes, axum::Error>>),
    Answered(Done),
    Read,
    Gone,
    Ending,
}

impl Drive {
    pub(super) fn new(
        state: AppState,
        intake: Intake,
        outlet: Outlet,
        body: Body,
        unread: Unread,
        head: oneshot::Sender<Result<(), Problem>>,
        packs: Coding,
    ) -> Drive {
        state.metrics.enter();
        let ending = state.ending.subscribe();
        Drive {
            running: Running(state),
            intake: Some(intake),
            outlet,
            body,
            all_arrived: false,
            unread,
            head: Some(head),
            working: VecDeque::new(),
            ending,
            packing: Packer::new(packs).map_or(Packing::Not, Packing::By),
        }
    }

    /// Drives the series to its end.
    pub(super) async fn run(mut self, trailers: bool) {
        // A panic harms this series alone: nothing of it is shared but counters.
        let finished = AssertUnwindSafe(self.whole()).catch_unwind().await;
        let finished = finished.unwrap_or(Err(Failure::Panicked));
        let counts = self.outlet.counts();
        let metrics = &self.running.0.metrics;
        metrics.rows(counts);
        match finished {
            Ok(()) => {
                let numbers = [counts.read, counts.answered, counts.refused];
                let pairs = TRAILERS.into_iter().zip(numbers).filter(|_| trailers);
                let trailers: HeaderMap = pairs
                    .map(|(name, number)| {
                        let name = axum::http::HeaderName::from_static(name);
                        (name, HeaderValue::from(number))
                    })
                    .collect();
                self.unread.end(trailers);
            }
            Err(Failure::Gone) => return,
            Err(failure) => {
                if let Failure::Panicked = failure {
                    metrics.panics.inc();
                    self.all_arrived = true;
                }
                let refusal = failure.refusal(self.running.0.config.idle_timeout);
                if self.head.is_some() {
                    let problem = Problem::from_faults(refusal.faults, Source::Table);
                    self.begin(Err(problem));
                } else {
                    let last_word = self.outlet.failed(&refusal);
                    self.send(last_word, false).await;
                }
                drop(self.unread);
            }
        }
        let rest = async { while let Some(Ok(_)) = self.body.frame().await {} };
        if !self.all_arrived {
            let _ = timeout(LINGER, rest).await;
        }
    }

    /// Answers all rows, and what stands after them.
    async fn whole(&mut self) -> Result<(), Failure> {
        self.rows().await?;
        self.begin(Ok(()));
        let end = self.outlet.end();
        if self.send(end, true).await {
            Ok(())
        } else {
            Err(Failure::Gone)
        }
    }

    /// Answers all rows that come.
    async fn rows(&mut self) -> Result<(), Failure> {
        let state = self.running.0.clone();
        let (depth, idle) = (state.pool.threads() + 1, state.config.idle_timeout);
        let mut ended = false;
        loop {
            // What waits for a client that reads slowly is bounded by few blocks under way.
            let depth = if self.unread.is_half_full() { 1 } else { depth };
            let mut room = self.working.len() < depth && !self.unread.is_full();
            if room && !ended {
                ended = self.read_what_is_there().await?;
                let job = self.job(ended).await;
                if self.take_on(job, &state).await? {
                    continue;
                }
                room = !ended;
            }
            if self.outlet.stopped() || (ended && self.working.is_empty()) {
                return Ok(());
            }
            match timeout(idle, self.next(room && !ended)).await {
                Err(_) => return Err(Failure::Idle),
                Ok(Event::Gone) => return Err(Failure::Gone),
                Ok(Event::Ending) => return Err(Failure::Ending),
                Ok(Event::Read) => {}
                Ok(Event::Answered(done)) => self.accept(done).await?,
                Ok(Event::Arrived(Some(bytes))) => {
                    self.intake().push(&bytes.map_err(|_| Failure::Broken)?);
                }
                Ok(Event::Arrived(None)) => self.all_arrived = true,
            }
        }
    }

    /// The next job, if there is one.
    async fn job(&mut self, ended: bool) -> Result<Option<Job>, Refusal> {
        // With nothing else to do, and nothing more at hand: what there is.
        let least = if self.working.is_empty() { 1 } else { BLOCK };
        let next = move |intake: &mut Intake| match ended {
            true => intake.last(),
            false => intake.job(least),
        };
        let intake = self.intake();
        if !intake.is_packed() {
            return next(intake);
        }
        let mut intake = self.intake.take().expect("it is here");
        let work = move || {
            let job = next(&mut intake);
            (intake, job)
        };
        let (intake, job) = self.running.0.pool.run(work).await;
        self.intake = Some(intake);
        job
    }

    fn intake(&mut self) -> &mut Intake {
        self.intake.as_mut().expect("the pool gave it back")
    }

    /// Takes what has arrived already, up to a block; whether it is the end.
    async fn read_what_is_there(&mut self) -> Result<bool, Failure> {
        while !self.all_arrived && !self.intake().is_full() {
            let body = &mut self.body;
            let at_once = poll_fn(|cx| Poll::Ready(Pin::new(&mut *body).poll_frame(cx))).await;
            match at_once {
                Poll::Pending => return Ok(false),
                Poll::Ready(None) => self.all_arrived = true,
                Poll::Ready(Some(Err(_))) => return Err(Failure::Broken),
                Poll::Ready(Some(Ok(frame))) => {
                    self.intake().push(&frame.into_data().unwrap_or_default());
                }
            }
        }
        Ok(self.all_arrived)
    }

    /// Hands a job over, or does a small one; whether there was any. What is wrong with the rows
    /// counts only after those before are answered.
    async fn take_on(
        &mut self,
        job: Result<Option<Job>, Refusal>,
        state: &AppState,
    ) -> Result<bool, Failure> {
        match job {
            Ok(None) => Ok(false),
            Ok(Some(job)) if job.bytes() <= SMALL && self.working.is_empty() => {
                self.accept(job.run()).await?;
                Ok(!self.outlet.stopped())
            }
            Ok(Some(job)) => {
                self.working.push_back(state.pool.run(|| job.run()));
                Ok(true)
            }
            Err(refusal) => {
                while let Some(work) = self.working.pop_front() {
                    self.accept(work.await).await?;
                }
                if self.outlet.stopped() {
                    return Ok(false);
                }
                Err(Failure::Refused(refusal))
            }
        }
    }

    /// What happens next: `reads` says whether there is room for more of the question.
    async fn next(&mut self, reads: bool) -> Event {
        let Drive {
            body,
            working,
            unread,
            ending,
            ..
        } = self;
        let full = unread.is_full();
        let first = async {
            match working.front_mut() {
                Some(work) => work.await,
                None => std::future::pending().await,
            }
        };
        tokio::select! {
            biased;
            _ = ending.wait_for(|ending| *ending) => Event::Ending,
            done = first => {
                working.pop_front();
                Event::Answered(done)
            }
            () = unread.gone() => Event::Gone,
            frame = body.frame(), if reads => Event::Arrived(frame.map(|frame| {
                frame.map(|frame| frame.into_data().unwrap_or_default())
            })),
            () = unread.fewer(), if full => Event::Read,
        }
    }

    /// Sends the next answers.
    async fn accept(&mut self, done: Done) -> Result<(), Failure> {
        let pieces = self.outlet.accept(done);
        if pieces.is_empty() {
            return Ok(());
        }
        self.begin(Ok(()));
        if self.send(pieces, false).await {
            Ok(())
        } else {
            Err(Failure::Gone)
        }
    }

    /// Sends pieces of the answer, the `last` ones or not; whether anyone is still there to read
    /// them.
    async fn send(&mut self, mut pieces: Vec<Bytes>, last: bool) -> bool {
        match std::mem::replace(&mut self.packing, Packing::Broken) {
            Packing::Not => self.packing = Packing::Not,
            Packing::Broken => return true,
            Packing::By(mut packer) => {
                let size: usize = pieces.iter().map(Bytes::len).sum();
                let pack = move || {
                    let packed = packer.pack(&pieces, last);
                    (packer, packed)
                };
                let (packer, packed) = if size <= SMALL {
                    pack()
                } else {
                    let state = self.running.0.clone();
                    state.pool.run(pack).await
                };
                self.packing = Packing::By(packer);
                pieces = vec![packed];
            }
        }
        pieces.into_iter().all(|piece| self.unread.send(piece))
    }

    /// Says how the answer begins, if that was not said before.
    fn begin(&mut self, how: Result<(), Problem>) {
        if let Some(head) = self.head.take() {
            let _ = head.send(how);
        }
    }
}

impl Drop for Running {
    fn drop(&mut self) {
        self.0.metrics.leave();
    }
}
