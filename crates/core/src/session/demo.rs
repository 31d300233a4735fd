use super::{OpenedSession, SessionError};

/// A session of an invented laboratory that is part of the program.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Demo {
    /// Its name.
    pub name: &'static str,
    /// What it shows, in one line.
    pub about: &'static str,
    /// The text of its file.
    pub text: &'static str,
}

/// The demos, the first of which is shown when none is named.
pub const DEMOS: [Demo; 2] = [
    Demo {
        name: "eulerian-orthorhombic",
        about: "an orthorhombic crystal on a Eulerian four-circle, Mo Ka",
        text: include_str!("../../../../demo-sessions/eulerian-orthorhombic.ron"),
    },
    Demo {
        name: "kappa-monoclinic",
        about: "a monoclinic crystal on a kappa four-circle, 20 keV",
        text: include_str!("../../../../demo-sessions/kappa-monoclinic.ron"),
    },
];

/// The demo of this name.
pub fn demo(name: &str) -> Option<&'static Demo> {
    DEMOS.iter().find(|demo| demo.name == name)
}

impl Demo {
    /// The demo as an unsaved copy.
    ///
    /// # Errors
    /// Never for a demo of the program: a test opens each.
    pub fn open(&self) -> Result<OpenedSession, SessionError> {
        OpenedSession::unsaved_copy(&format!("demo {}", self.name), self.text)
    }
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;
    use crate::session::MachineLibrary;

    #[test]
    fn every_demo_opens_and_fits_together() {
        for known in DEMOS {
            let opened = known.open().unwrap();
            assert!(opened.path().is_none() && opened.has_comments(), "{}", known.name);
            let resolved = opened.session.resolve(&MachineLibrary::default()).unwrap();
            assert!(resolved.notes.is_empty(), "{}: {:?}", known.name, resolved.notes);
            assert!(resolved.peaks.len() >= 3 && resolved.peaks.iter().all(|peak| peak.uncertainty_deg.is_some()));
            assert_eq!(demo(known.name), Some(&known));
        }
    }
}
