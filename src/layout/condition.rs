//! The array condition: how many telescopes must fire, of all or of some kinds.

use super::error::LayoutError;

/// At least `least` telescopes of some kinds.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub struct Clause {
    /// Indices of kinds that count; empty means all.
    pub kinds: Vec<usize>,
    /// How many of them must fire.
    pub least: usize,
}

impl Clause {
    /// Whether a kind counts.
    pub fn counts(&self, kind: usize) -> bool {
        self.kinds.is_empty() || self.kinds.contains(&kind)
    }
}

/// All clauses must hold.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub struct Condition {
    /// The clauses; none means that every event is kept.
    pub clauses: Vec<Clause>,
}

impl Condition {
    /// At least `least` telescopes of any kind.
    pub fn any(least: usize) -> Self {
        Self { clauses: vec![Clause { kinds: Vec::new(), least }] }
    }

    /// Whether telescopes of these kinds can meet it.
    ///
    /// # Errors
    /// [`LayoutError::Condition`] with the first clause that asks for none or for too many.
    pub fn check(&self, kinds: &[usize]) -> Result<(), LayoutError> {
        for clause in &self.clauses {
            let telescopes = kinds.iter().filter(|&&kind| clause.counts(kind)).count();
            if clause.least == 0 || clause.least > telescopes {
                return Err(LayoutError::Condition { least: clause.least, telescopes });
            }
        }
        Ok(())
    }
}
