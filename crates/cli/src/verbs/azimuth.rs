use std::fmt::Write as _;

use ringwright_core::aim::Reference;
use ringwright_core::frames::Hkl;
use ringwright_core::reach::{JudgedSetting, Settings, Verdict, Window};
use ringwright_core::work::{AzimuthView, NEAR_SPHERE, SIMULTANEOUS_D_ANGSTROM};

use super::night::Night;
use crate::args::AzimuthArgs;
use crate::deliver::Desktop;
use crate::failure::Failure;
use crate::{DONE, NO};

pub fn azimuth(args: &AzimuthArgs, desktop: &mut Desktop<'_, '_>) -> Result<u8, Failure> {
    let night = Night::open(&args.session)?;
    night.tell_notes(desktop);
    let orientation = night.orient(desktop)?.orientation;
    let [h, k, l] = args.hkl.0;
    let hkl = Hkl::new(h, k, l);
    if orientation.q_in_head(hkl).norm() <= 0.0 {
        return Err(Failure::new("--hkl 0,0,0: the direct beam has no azimuth; accepted are three indices, not all 0"));
    }
    let progress = desktop.progress("listing nodes");
    let view = AzimuthView::new(&night.inputs, &orientation, args.reference, &progress)
        .map_err(|error| night.failure(&error))?;
    drop(progress);
    let page = Page { view: &view, night: &night, hkl };
    let (text, status) = match view.windows(hkl) {
        Ok(windows) => {
            let status = if windows.any_deg.is_empty() { NO } else { DONE };
            (page.write(&windows.windows, &windows.any_deg, args.at), status)
        }
        Err(none) => {
            let why = Verdict::from(none).detail(&night.inputs.instrument);
            (format!("{}\n\n  No setting: {why}.\n", page.head()), NO)
        }
    };
    desktop.deliver(args.output.as_deref(), status, |out| out.write_all(text.as_bytes()))
}

struct Page<'a> {
    view: &'a AzimuthView,
    night: &'a Night,
    hkl: Hkl,
}

impl Page<'_> {
    fn head(&self) -> String {
        let inputs = &self.night.inputs;
        format!(
            "Azimuth of {}, {}, {}\n\
             ψ counts from {}: 0 where its part across Q points along k_i + k_f; it grows by a right-handed turn about Q.",
            self.hkl,
            inputs.radiation.describe(),
            inputs.instrument.name(),
            described(&self.view.reference()),
        )
    }

    fn write(&self, windows: &[Window], any_deg: &[(f64, f64)], at: Option<f64>) -> String {
        let mut page = self.head();
        page.push_str("\n\n  Allowed, by any branch\n");
        match any_deg {
            [] => page.push_str("    nowhere: each azimuth takes some axis past its limit\n"),
            all => {
                for (from, to) in all {
                    let _ = writeln!(page, "    {from:9.3}° to {to:9.3}°");
                }
            }
        }
        page.push_str("\n  Windows of each branch       from          to       ends because\n");
        for window in windows {
            let branch = window.branch.map_or_else(|| "any".to_owned(), |branch| (branch + 1).to_string());
            let _ = writeln!(
                page,
                "    branch {branch:<12}{:>12.3}°{:>11.3}°       {}",
                window.from_deg,
                window.to_deg,
                self.reasons(window)
            );
        }
        self.crossings(&mut page);
        if let Some(psi_deg) = at {
            self.at(&mut page, psi_deg);
        }
        page
    }

    fn reasons(&self, window: &Window) -> String {
        let instrument = &self.night.inputs.instrument;
        // The figure of a reason just beyond an end is 0, so only its name counts.
        let word = |verdict: Verdict| match verdict {
            Verdict::OverLimit { axis, .. } => {
                let name = instrument.axes().nth(usize::from(axis)).map_or("?", |axis| axis.name.as_str());
                format!("{name} at its limit")
            }
            Verdict::CannotMake { .. } => "the axes make no more".to_owned(),
            Verdict::BelowSurface { incident: true, .. } => "incident beam along the surface".to_owned(),
            Verdict::BelowSurface { .. } => "diffracted beam along the surface".to_owned(),
            other => other.word().to_owned(),
        };
        match (window.before, window.after) {
            (Some(before), Some(after)) => format!("{}; {}", word(before), word(after)),
            _ => "a full turn".to_owned(),
        }
    }

    fn crossings(&self, page: &mut String) {
        let all = self.view.crossings(self.hkl);
        let _ = writeln!(
            page,
            "\n  Simultaneous reflections G, with d of G and of H - G above {SIMULTANEOUS_D_ANGSTROM} Å and neither absent: {} crossings",
            all.len()
        );
        if !all.is_empty() {
            page.push_str("          ψ       G\n");
        }
        for crossing in all {
            let _ = writeln!(page, "    {:9.3}°    {}", crossing.psi_deg, crossing.node);
        }
    }

    fn at(&self, page: &mut String, psi_deg: f64) {
        let _ = writeln!(page, "\n  Settings at ψ = {psi_deg}°");
        let names: Vec<String> =
            self.night.inputs.instrument.axes().map(|axis| format!("{:>11}", axis.name.as_str())).collect();
        let _ = writeln!(page, "    {}", names.concat());
        if let Settings::Judged(all) = self.view.settings_at(self.hkl, psi_deg) {
            all.iter().for_each(|judged| self.setting(page, judged));
        }
        let near = self.view.near_sphere(self.hkl, psi_deg);
        let _ = writeln!(page, "\n  Nodes within {NEAR_SPHERE} 1/Å of the sphere there: {}", near.len());
        for node in near {
            let _ = writeln!(page, "    {}, off by {:.5} 1/Å", node.node, node.distance);
        }
    }

    fn setting(&self, page: &mut String, judged: &JudgedSetting) {
        let readings: String = match &judged.setting {
            Some(setting) => setting.rounded(4).readings_deg().iter().map(|deg| format!("{deg:>11.4}")).collect(),
            None => " ".repeat(11 * self.night.inputs.instrument.axis_count()),
        };
        let verdict = match judged.verdict {
            Verdict::Reachable => "reachable".to_owned(),
            other => other.detail(&self.night.inputs.instrument),
        };
        let _ = writeln!(page, "    {readings}  {verdict}");
    }
}

fn described(reference: &Reference) -> String {
    let [x, y, z] = reference.components();
    match reference {
        Reference::Reciprocal { .. } => format!("the reciprocal direction {x} {y} {z}"),
        Reference::Direct { .. } => format!("the direct direction {x} {y} {z}"),
    }
}
