//! A timer for deadlines that are moved with every request and almost never reached.

use std::{
    future::Future,
    pin::Pin,
    task::{Context, Poll, ready},
    time::Instant,
};

use hyper::rt::{Sleep, Timer};
use pin_project_lite::pin_project;

/// Moving a deadline costs one store: the runtime's own timer is moved only when it runs out.
#[derive(Clone, Copy, Debug)]
pub(super) struct LazyTimer;

impl Timer for LazyTimer {
    fn sleep(&self, duration: std::time::Duration) -> Pin<Box<dyn Sleep>> {
        self.sleep_until(Instant::now() + duration)
    }

    fn sleep_until(&self, deadline: Instant) -> Pin<Box<dyn Sleep>> {
        let inner = tokio::time::sleep_until(deadline.into());
        Box::pin(LazySleep { deadline, inner })
    }

    fn now(&self) -> Instant {
        tokio::time::Instant::now().into()
    }

    fn reset(&self, sleep: &mut Pin<Box<dyn Sleep>>, new_deadline: Instant) {
        match sleep.as_mut().downcast_mut_pin::<LazySleep>() {
            Some(lazy) => lazy.reset(new_deadline),
            None => *sleep = self.sleep_until(new_deadline),
        }
    }
}

pin_project! {
    struct LazySleep {
        deadline: Instant,
        // Runs out at a deadline of before, or at this one.
        #[pin]
        inner: tokio::time::Sleep,
    }
}

impl LazySleep {
    fn reset(self: Pin<&mut Self>, deadline: Instant) {
        let mut this = self.project();
        let earlier = deadline < *this.deadline;
        *this.deadline = deadline;
        if earlier {
            this.inner.as_mut().reset(deadline.into());
        }
    }
}

impl Future for LazySleep {
    type Output = ();

    fn poll(self: Pin<&mut Self>, cx: &mut Context<'_>) -> Poll<()> {
        let mut this = self.project();
        loop {
            ready!(this.inner.as_mut().poll(cx));
            let deadline = (*this.deadline).into();
            if this.inner.deadline() >= deadline {
                return Poll::Ready(());
            }
            this.inner.as_mut().reset(deadline);
        }
    }
}

impl Sleep for LazySleep {}
