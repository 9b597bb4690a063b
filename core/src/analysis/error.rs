//! Why a loop could not be analysed.

use crate::answer::{Field, Problem};
use crate::dead_time::DeadTimeError;
use crate::exact::ExactError;
use crate::sampled::Trouble;
use alloc::format;
use alloc::string::{String, ToString};

/// Why a loop could not be analysed.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum AnalysisError {
    /// A cap of the exact methods.
    Exact(ExactError),
    /// The loop is of a kind that is not treated: the field, and what to type instead.
    Refused(Field, String),
}

impl AnalysisError {
    /// For the user.
    #[must_use]
    pub fn problem(self) -> Problem {
        let (field, message) = match self {
            Self::Exact(error) => {
                (Field::Loop, format!("this loop could not be solved within the limits of the exact methods: {error}"))
            }
            Self::Refused(field, message) => (field, message),
        };
        Problem { field, symbol: None, span: None, message }
    }
}

impl From<ExactError> for AnalysisError {
    fn from(error: ExactError) -> Self {
        Self::Exact(error)
    }
}

impl From<DeadTimeError> for AnalysisError {
    fn from(error: DeadTimeError) -> Self {
        let message = match error {
            DeadTimeError::Exact(error) => return Self::Exact(error),
            DeadTimeError::NotRetarded { .. } => {
                "with dead time the loop needs more poles than zeros, else it has infinitely many poles at high \
                 frequency: add a filter pole, such as 1/(0.01 s + 1)"
                    .to_string()
            }
            other => format!("this loop with dead time could not be solved: {other}"),
        };
        Self::Refused(Field::Loop, message)
    }
}

impl From<Trouble> for AnalysisError {
    fn from(trouble: Trouble) -> Self {
        match trouble {
            Trouble::Exact(error) => Self::Exact(error),
            Trouble::Refused(message) => Self::Refused(Field::Loop, message),
            Trouble::Undecided => Self::Refused(
                Field::Loop,
                "this sampled loop lies too near a border to be decided: change a number in its last digit".to_string(),
            ),
        }
    }
}
