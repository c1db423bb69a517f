//! A timer for deadlines that are moved with every request and almost never reached.

use std::{
    future::Future,
    pin::Pin,
    sync::{Arc, Mutex, PoisonError},
    task::{Context, Poll, ready},
    time::{Duration, Instant},
};

use hyper::rt::{Sleep, Timer};

/// The timer of one connection. A deadline costs one store: the runtime's own timer is kept from
/// one deadline to the next, and moved only when it runs out.
#[derive(Clone, Debug, Default)]
pub(super) struct LazyTimer {
    spare: Arc<Mutex<Option<Alarm>>>,
}

/// Of the runtime; runs out at a deadline of before, or at the one that counts.
type Alarm = Pin<Box<tokio::time::Sleep>>;

impl LazyTimer {
    fn spare(&self) -> std::sync::MutexGuard<'_, Option<Alarm>> {
        self.spare.lock().unwrap_or_else(PoisonError::into_inner)
    }
}

impl Timer for LazyTimer {
    fn sleep(&self, duration: Duration) -> Pin<Box<dyn Sleep>> {
        self.sleep_until(Instant::now() + duration)
    }

    fn sleep_until(&self, deadline: Instant) -> Pin<Box<dyn Sleep>> {
        let new = || Box::pin(tokio::time::sleep_until(deadline.into()));
        let alarm = self.spare().take().unwrap_or_else(new);
        let timer = self.clone();
        let mut sleep = LazySleep {
            deadline,
            alarm: Some(alarm),
            timer,
        };
        sleep.reset(deadline);
        Box::pin(sleep)
    }

    fn now(&self) -> Instant {
        tokio::time::Instant::now().into()
    }

    fn reset(&self, sleep: &mut Pin<Box<dyn Sleep>>, new_deadline: Instant) {
        match sleep.as_mut().downcast_mut_pin::<LazySleep>() {
            Some(lazy) => lazy.get_mut().reset(new_deadline),
            None => *sleep = self.sleep_until(new_deadline),
        }
    }
}

struct LazySleep {
    deadline: Instant,
    /// Away only once this is dropped.
    alarm: Option<Alarm>,
    timer: LazyTimer,
}

impl LazySleep {
    fn reset(&mut self, deadline: Instant) {
        self.deadline = deadline;
        if let Some(alarm) = &mut self.alarm
            && alarm.deadline() > deadline.into()
        {
            alarm.as_mut().reset(deadline.into());
        }
    }
}

impl Future for LazySleep {
    type Output = ();

    fn poll(mut self: Pin<&mut Self>, cx: &mut Context<'_>) -> Poll<()> {
        let deadline = self.deadline.into();
        let Some(alarm) = &mut self.alarm else {
            return Poll::Ready(());
        };
        loop {
            ready!(alarm.as_mut().poll(cx));
            if alarm.deadline() >= deadline {
                return Poll::Ready(());
            }
            alarm.as_mut().reset(deadline);
        }
    }
}

impl Drop for LazySleep {
    fn drop(&mut self) {
        *self.timer.spare() = self.alarm.take();
    }
}

impl Sleep for LazySleep {}
