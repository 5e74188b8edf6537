//! Threads that answer requests: one the fast part, one the slow, one what the other pages tell; the newest request wins.

use super::answer::{Answer, Request, quick, thorough};
use super::story::tell;
use crate::bath::BathError;
use std::sync::mpsc::{Receiver, Sender, channel};

/// The worker. Dropping it ends its threads after the request at hand.
pub struct Worker {
    fast: Sender<Request>,
    slow: Sender<Request>,
    stories: Sender<Request>,
    answers: Receiver<Answer>,
}

impl Worker {
    /// Starts the threads; `wake` is called after each answer, from the thread that computed it.
    pub fn start(wake: impl Fn() + Clone + Send + 'static) -> std::io::Result<Self> {
        let (answer, answers) = channel();
        let fast = spawn("equilibrium", answer.clone(), wake.clone(), |request| {
            Some(quick(request).map(|quick| Answer::Quick(Box::new(quick))))
        })?;
        let slow = spawn("dose search", answer.clone(), wake.clone(), |request| {
            Some(thorough(request).map(|thorough| Answer::Thorough(Box::new(thorough))))
        })?;
        let stories = spawn("stories", answer, wake, |request| {
            tell(request).map(|told| Ok(Answer::Told(Box::new(told))))
        })?;
        Ok(Self { fast, slow, stories, answers })
    }

    /// Asks for a new version; older ones that no thread has begun are dropped. A thread that died answers no more,
    /// which shows as a picture that stays stale.
    pub fn ask(&self, request: &Request) {
        for queue in [&self.fast, &self.slow, &self.stories] {
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
    compute: impl Fn(&Request) -> Option<Result<Answer, BathError>> + Send + 'static,
) -> std::io::Result<Sender<Request>> {
    let (queue, requests) = channel::<Request>();
    std::thread::Builder::new().name(name.to_owned()).spawn(move || {
        while let Ok(mut request) = requests.recv() {
            while let Ok(newer) = requests.try_recv() {
                request = newer;
            }
            let generation = request.generation;
            let Some(result) = compute(&request) else { continue };
            let answered = result.unwrap_or_else(|error| Answer::Failed { generation, error });
            if answer.send(answered).is_err() {
                return;
            }
            wake();
        }
    })?;
    Ok(queue)
}
