use ringwright_core::aim::{Crossing, NoSetting, Reference};
use ringwright_core::frames::Hkl;
use ringwright_core::instrument::Instrument;
use ringwright_core::reach::{AzimuthWindows, Verdict, Window};
use ringwright_core::work::AzimuthView;

use super::super::number::{fixed, indices};
use super::super::palette::Kind;

/// Looks over the whole turn that tell why not: one a degree, about as fine as the ribbon is drawn.
const STEPS: usize = 360;

/// An end of a window and an edge of the windows together are one place within this, in degrees.
const SAME_END_DEG: f64 = 1e-4;

/// A stretch of ψ in which nothing is allowed, for one reason.
pub(super) struct Refused {
    pub from_deg: f64,
    pub to_deg: f64,
    /// Of the best setting at the first look.
    pub verdict: Verdict,
}

/// Where what is allowed ends.
pub(super) struct End {
    pub psi_deg: f64,
    /// Why not beyond it.
    pub beyond: Verdict,
}

/// What the ribbon of one reflection shows; all in degrees of ψ from −180 to 180.
pub(super) struct Content {
    pub refused: Vec<Refused>,
    /// Stretches in which at least one setting is allowed.
    pub allowed_deg: Vec<(f64, f64)>,
    pub ends: Vec<End>,
    /// In order of ψ.
    pub crossings: Vec<Crossing>,
}

impl Content {
    /// Takes milliseconds: not for every frame.
    pub fn of(view: &AzimuthView, hkl: Hkl) -> Result<Self, NoSetting> {
        let AzimuthWindows { windows, any_deg } = view.windows(hkl)?;
        let steps = view.ribbon(hkl, STEPS)?;
        let verdicts: Vec<(f64, Verdict)> = steps.iter().map(|step| (step.psi_deg, step.verdict)).collect();
        Ok(Self {
            refused: refused(&verdicts),
            ends: ends(&windows, &any_deg),
            allowed_deg: any_deg,
            crossings: view.crossings(hkl),
        })
    }

    /// The stretch about an azimuth in which something is allowed.
    pub fn allowed_at(&self, psi_deg: f64) -> Option<(f64, f64)> {
        self.allowed_deg.iter().copied().find(|&(from, to)| (from..=to).contains(&psi_deg))
    }

    /// The windows for whoever cannot see them.
    pub fn spoken(&self) -> String {
        if self.allowed_deg.is_empty() {
            return "allowed nowhere".to_owned();
        }
        let windows: Vec<String> = self.allowed_deg.iter().map(|&(a, b)| range(a, b)).collect();
        format!("allowed {}; {} simultaneous reflections", windows.join(" and "), self.crossings.len())
    }
}

/// Looks that are refused for the same reason, together. A stretch goes half a look into what is allowed beside it: the
/// exact windows are drawn over it.
fn refused(looks: &[(f64, Verdict)]) -> Vec<Refused> {
    let step = 360.0 / looks.len().max(1) as f64;
    let mut all: Vec<Refused> = Vec::new();
    let mut open = false;
    for &(psi_deg, verdict) in looks {
        let (from_deg, to_deg) = ((psi_deg - step).max(-180.0), (psi_deg + step).min(180.0));
        match all.last_mut() {
            _ if verdict.is_reachable() => open = false,
            Some(last) if open && is_same_reason(last.verdict, verdict) => last.to_deg = to_deg,
            last => {
                let next_to = last.filter(|_| open).map(|last| {
                    last.to_deg = psi_deg - 0.5 * step;
                    last.to_deg
                });
                all.push(Refused { from_deg: next_to.unwrap_or(from_deg), to_deg, verdict });
                open = true;
            }
        }
    }
    all
}

/// Whether two verdicts differ at most by how far.
fn is_same_reason(a: Verdict, b: Verdict) -> bool {
    match (a, b) {
        (Verdict::OverLimit { axis: a, .. }, Verdict::OverLimit { axis: b, .. }) => a == b,
        (Verdict::BelowSurface { incident: a, .. }, Verdict::BelowSurface { incident: b, .. }) => a == b,
        _ => a.kind() == b.kind(),
    }
}

/// Edges of the windows together, with the reason of the branch that ends there last. Where a stretch only goes on beyond
/// ±180° there is none.
fn ends(windows: &[Window], any_deg: &[(f64, f64)]) -> Vec<End> {
    let before = |window: &Window| window.before.map(|reason| (window.from_deg, reason));
    let after = |window: &Window| window.after.map(|reason| (window.to_deg, reason));
    let end = |at: f64, reason: &dyn Fn(&Window) -> Option<(f64, Verdict)>| {
        let own = windows.iter().filter_map(reason).find(|(deg, _)| turns_apart(*deg, at) < SAME_END_DEG);
        own.map(|(_, beyond)| End { psi_deg: at, beyond })
    };
    any_deg.iter().flat_map(|&(from, to)| [end(from, &before), end(to, &after)]).flatten().collect()
}

/// Degrees between two azimuths, whole turns apart from each other or not.
fn turns_apart(a: f64, b: f64) -> f64 {
    let by = a - b;
    (by - 360.0 * (by / 360.0).round()).abs()
}

/// What is met at the end of a window.
pub(super) fn met(beyond: Verdict, instrument: &Instrument) -> String {
    match beyond {
        Verdict::OverLimit { axis, .. } => {
            let name = instrument.axes().nth(usize::from(axis)).map_or("?", |axis| axis.name.as_str());
            format!("{name} comes to its limit")
        }
        Verdict::CannotMake { .. } => "beyond it the axes cannot make the angle".to_owned(),
        Verdict::BelowSurface { incident, .. } => {
            format!("the {} beam comes to the surface", if incident { "incident" } else { "diffracted" })
        }
        other => format!("beyond it {}", Kind::of(other).words()),
    }
}

/// "−12.3° to 45.6°".
pub(super) fn range(from_deg: f64, to_deg: f64) -> String {
    format!("{}° to {}°", fixed(from_deg, 3), fixed(to_deg, 3))
}

/// What ψ counts from, in words.
pub(super) fn from_words(reference: Reference) -> String {
    let [x, y, z] = reference.components();
    let kind = match reference {
        Reference::Reciprocal { .. } => "h k l",
        Reference::Direct { .. } => "u v w",
    };
    format!("{kind} = {}", indices(Hkl::new(x, y, z), 0))
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    const OVER_CHI: Verdict = Verdict::OverLimit { axis: 1, by_deg: 2.0 };
    const OVER_PHI: Verdict = Verdict::OverLimit { axis: 2, by_deg: 1.0 };

    #[test]
    fn looks_with_the_same_reason_are_one_stretch() {
        let far = Verdict::OverLimit { axis: 1, by_deg: 9.0 };
        let verdicts = [OVER_CHI, far, OVER_PHI, Verdict::Reachable, Verdict::Reachable, far];
        let looks: Vec<(f64, Verdict)> =
            verdicts.into_iter().enumerate().map(|(i, v)| (-150.0 + 60.0 * i as f64, v)).collect();
        let stretches: Vec<(f64, f64, usize)> =
            refused(&looks).iter().map(|s| (s.from_deg, s.to_deg, s.verdict.kind())).collect();
        // The two axes meet half way between their looks; beside what is allowed there is an overlap, to be drawn over.
        assert_eq!(stretches, [(-180.0, -60.0, 4), (-60.0, 30.0, 4), (90.0, 180.0, 4)]);
    }

    #[test]
    fn an_edge_at_180_is_an_end_only_if_a_window_ends_there() {
        let window = |from_deg, to_deg| Window {
            branch: Some(0),
            from_deg,
            to_deg,
            before: Some(OVER_CHI),
            after: Some(OVER_PHI),
        };
        let across = ends(&[window(150.0, 200.0)], &[(-180.0, -160.0), (150.0, 180.0)]);
        let told: Vec<(f64, Verdict)> = across.iter().map(|end| (end.psi_deg, end.beyond)).collect();
        assert_eq!(told, [(-160.0, OVER_PHI), (150.0, OVER_CHI)]);
        let up_to = ends(&[window(150.0, 180.0)], &[(150.0, 180.0)]);
        assert_eq!(up_to.len(), 2);
        let whole = Window { before: None, after: None, ..window(-180.0, 180.0) };
        assert!(ends(&[whole], &[(-180.0, 180.0)]).is_empty());
    }
}
