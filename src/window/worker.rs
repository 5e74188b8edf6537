//! Two threads that answer requests, one the fast part and one the slow; the newest request wins.

use super::answer::{Answer, Request, quick, thorough};
use std::sync::mpsc::{Receiver, Sender, channel};

/// The worker. Dropping it ends its threads after the request at hand.
pub struct Worker {
    fast: Sender<Request>,
    slow: Sender<Request>,
    answers: Receiver<Answer>,
}

impl Worker {
    /// Starts both threads; `wake` is called after each answer, from the thread that computed it.
    pub fn start(wake: impl Fn() + Clone + Send + 'static) -> std::io::Result<Self> {
        let (answer, answers) = channel();
        let fast = spawn("equilibrium", answer.clone(), wake.clone(), |request| {
            quick(request).map(|quick| Answer::Quick(Box::new(quick)))
        })?;
        let slow = spawn("dose search", answer, wake, |request| {
            thorough(request).map(|thorough| Answer::Thorough(Box::new(thorough)))
        })?;
        Ok(Self { fast, slow, answers })
    }

    /// Asks for a new version; older ones that no thread has begun are dropped. A thread that died answers no more,
    /// which shows as a picture that stays stale.
    pub fn ask(&self, request: &Request) {
        for queue in [&self.fast, &self.slow] {
            if queue.send(request.clone()).is_err() {
                log::error!("a worker thread has ended");
            }
        }
    }

    /// The next answer, if one is ready.
    pub fn answer(&self) -> Option<Answer> {
        self.answers.try_recv().ok()
    }
}

fn spawn(
    name: &str,
    answer: Sender<Answer>,
    wake: impl Fn() + Send + 'static,
    compute: impl Fn(&Request) -> Result<Answer, crate::bath::BathError> + Send + 'static,
) -> std::io::Result<Sender<Request>> {
    let (queue, requests) = channel::<Request>();
    std::thread::Builder::new().name(name.to_owned()).spawn(move || {
        while let Ok(mut request) = requests.recv() {
            while let Ok(newer) = requests.try_recv() {
                request = newer;
            }
            let generation = request.generation;
            let result = compute(&request).unwrap_or_else(|error| Answer::Failed { generation, error });
            if answer.send(result).is_err() {
                return;
            }
            wake();
        }
    })?;
    Ok(queue)
}
