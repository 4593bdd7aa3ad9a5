//! Cautions: what a reader must know beside a number, and what to do about it.

use serde::Serialize;

/// A caution: a stable id, and a sentence that says what to do.
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct Caution {
    /// Stable id.
    pub id: &'static str,
    /// The sentence.
    pub text: String,
}

/// Cautions in the order they arose, each id once.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Cautions(Vec<Caution>);

impl Cautions {
    /// Adds one unless its id is already there.
    pub fn say(&mut self, id: &'static str, text: impl Into<String>) {
        if !self.0.iter().any(|caution| caution.id == id) {
            self.0.push(Caution { id, text: text.into() });
        }
    }

    /// Adds all of `others`.
    pub fn join(&mut self, others: Self) {
        for caution in others.0 {
            self.say(caution.id, caution.text);
        }
    }

    /// As a plain list.
    pub fn into_vec(self) -> Vec<Caution> {
        self.0
    }
}
