//! The one way through: project in, answer out.

use crate::analysis::{Analysis, AnalysisError};
use crate::judgement::{judge, limits};
use crate::locus::Branch;
use crate::model;
use crate::project::{PROJECT_FORMAT, Project, Setting, SheetText, SiteCheckText, StepUpText};
use crate::record::{Program, RECORD_FORMAT, Reading, Record};
use crate::sheet::sheet;
use crate::site_check::check_tolerances;
use alloc::format;
use alloc::string::{String, ToString};
use alloc::vec::Vec;
use serde::{Deserialize, Serialize};

/// What Stayband says to a project: a record, or what must be put right before there can be one.
#[derive(Clone, Debug, PartialEq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Answer {
    /// What could be read of the blocks, even where something is wrong.
    pub reading: Reading,
    /// What must be put right; empty where there is a record.
    pub problems: Vec<Problem>,
    /// The result; None where there are problems.
    pub record: Option<Record>,
}

/// Something to be put right in the project, with the place and what to type instead.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub struct Problem {
    /// The field of the form.
    pub field: Field,
    /// The quantity's symbol, where the field is a row of the quantities table.
    pub symbol: Option<String>,
    /// First character and the one behind the last, counted in characters of the field's text.
    pub span: Option<[usize; 2]>,
    /// What is wrong and what to type instead.
    pub message: String,
}

/// A field of the form.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "camelCase")]
#[cfg_attr(feature = "types", derive(ts_rs::TS))]
pub enum Field {
    /// The controller's text.
    Controller,
    /// The plant's text.
    Plant,
    /// The sensor's text.
    Sensor,
    /// The dead time.
    DeadTime,
    /// The sampling; the symbol is the input's name in the document.
    Sampling,
    /// A row of the quantities table.
    Quantity,
    /// The choice of the knob.
    Knob,
    /// The setting or its scale.
    Setting,
    /// A requirement; the symbol is its kind.
    Requirement,
    /// The loop as a whole.
    Loop,
    /// The project document itself.
    Document,
}

/// Answers projects one after the other; what does not depend on the setting is kept while only the setting changes.
#[derive(Default)]
pub struct Session {
    /// The last project without its setting, with its analysis.
    last: Option<(Project, Analysis)>,
    analyses: u32,
}

/// An answer with the branches of the locus.
#[derive(Debug)]
pub struct Solved<'a> {
    /// The answer.
    pub answer: Answer,
    /// Both halves of the locus; empty where there is no record.
    pub branches: &'a [Branch],
    /// Counts up with every new analysis: the branches are the same while it stays.
    pub analysis: u32,
}

impl Session {
    /// Nothing answered yet.
    #[must_use]
    pub fn new() -> Self {
        Self::default()
    }

    /// Answers a project document; `program_hash` goes into the record.
    pub fn solve(&mut self, project_json: &str, program_hash: Option<&str>) -> Solved<'_> {
        let project = match read_project(project_json) {
            Ok(project) => project,
            Err(message) => {
                let problems = [Problem { field: Field::Document, symbol: None, span: None, message }].into();
                let answer = Answer { reading: Reading::default(), problems, record: None };
                return Solved { answer, branches: &[], analysis: self.analyses };
            }
        };
        let reading = model::reading(&project);
        match self.record(&project, &reading, program_hash) {
            Ok(record) => {
                let answer = Answer { reading, problems: Vec::new(), record: Some(record) };
                let branches = self.last.as_ref().map_or(&[][..], |(_, analysis)| &analysis.findings.branches);
                Solved { answer, branches, analysis: self.analyses }
            }
            Err(problems) => {
                Solved { answer: Answer { reading, problems, record: None }, branches: &[], analysis: self.analyses }
            }
        }
    }

    /// Answers a project document as [`Self::solve`] does, with the sheet's part of the record.
    pub fn sheet(&mut self, project_json: &str, program_hash: Option<&str>) -> Answer {
        let mut answer = self.solve(project_json, program_hash).answer;
        if let (Some(record), Some((_, analysis))) = (&mut answer.record, &self.last) {
            let project = &record.project;
            let made =
                model::build(project).and_then(|model| Ok((model, limits(project)?))).and_then(|(model, limits)| {
                    sheet(project, project_json, &model, analysis, &limits)
                        .map_err(|error| [AnalysisError::from(error).problem()].into())
                });
            match made {
                Ok(sheet) => record.sheet = Some(sheet),
                Err(problems) => return Answer { problems, record: None, ..answer },
            }
        }
        answer
    }

    fn record(
        &mut self,
        project: &Project,
        reading: &Reading,
        program_hash: Option<&str>,
    ) -> Result<Record, Vec<Problem>> {
        let limits = limits(project);
        let model = model::build(project).map_err(|mut problems| {
            problems.extend(limits.clone().err().unwrap_or_default());
            problems
        })?;
        let limits = limits?;
        check_tolerances(project)?;
        let (setting, scale) = (model.setting.clone(), model.scale.clone());
        let analysis = self.analysis(project, model).map_err(|error| [error.problem()])?;
        let knob = setting.as_ref().and_then(|setting| scale.knob(setting));
        let closed_loop =
            knob.as_ref().map(|knob| analysis.closed_loop(knob)).transpose().map_err(|error| [error.problem()])?;
        let judged = judge(analysis, &limits, &scale, setting.as_ref())
            .map_err(|error| [AnalysisError::from(error).problem()])?;
        let found = &analysis.findings;
        Ok(Record {
            format: RECORD_FORMAT.to_string(),
            program: Program {
                version: env!("CARGO_PKG_VERSION").to_string(),
                hash: program_hash.map(ToString::to_string),
            },
            project: project.clone(),
            reading: reading.clone(),
            model: model::record(&analysis.model),
            timing: analysis.timing(knob.as_ref()),
            stability: found.stability.clone(),
            character: found.character.clone(),
            landmarks: found.landmarks.clone(),
            asymptotes: found.asymptotes.clone(),
            real_axis: found.real_axis.clone(),
            poles: found.poles.clone(),
            zeros: found.zeros.clone(),
            closed_loop,
            scale: scale.record(),
            requirements: judged.requirements,
            permitted: judged.permitted,
            figures: judged.figures,
            margins: judged.margins,
            step: judged.step,
            load: judged.load,
            view: found.view,
            notices: [found.notices.clone(), judged.notices].concat(),
            sheet: None,
        })
    }

    /// The analysis of this project, kept or new.
    fn analysis(&mut self, project: &Project, model: model::Loop) -> Result<&Analysis, AnalysisError> {
        let key = without_notes(project);
        let kept = self.last.take().filter(|(last, _)| *last == key);
        let entry = match kept {
            Some(entry) => entry,
            None => {
                self.analyses += 1;
                (key, Analysis::new(model)?)
            }
        };
        Ok(&self.last.insert(entry).1)
    }
}

/// The project without what has no part in the analysis: setting, requirements, title, and notes to the reader.
fn without_notes(project: &Project) -> Project {
    let mut key = project.clone();
    key.setting = Setting::default();
    key.requirements.clear();
    key.title.clear();
    key.sheet = SheetText::default();
    key.step_up = StepUpText::default();
    key.site_check = SiteCheckText::default();
    for row in &mut key.quantities {
        row.unit.clear();
        row.meaning.clear();
        row.tolerance.clear();
        if row.symbol == key.knob {
            row.value.clear();
        }
    }
    key
}

/// What is read of any document first.
#[derive(Deserialize)]
struct Head {
    format: String,
}

/// Reads a project document; the message says what is wrong with it. The format comes first: a later version may have
/// fields of which nothing is known here.
fn read_project(json: &str) -> Result<Project, String> {
    let unreadable = |error: serde_json::Error| format!("this is no project that can be read: {error}");
    let Head { format } = serde_json::from_str(json).map_err(unreadable)?;
    if format == PROJECT_FORMAT {
        return serde_json::from_str(json).map_err(unreadable);
    }
    Err(match format.strip_prefix("stayband-project/") {
        Some(version) => {
            format!("this project has version {version}; this Stayband reads version 1: open it with a newer Stayband")
        }
        None => format!("this is no Stayband project: its format is \"{format}\", not \"{PROJECT_FORMAT}\""),
    })
}
