use std::path::PathBuf;

use clap::{Args, Parser, Subcommand};
use ringwright_core::aim::Reference;
use ringwright_core::quantity::Index;
use ringwright_core::route::DEFAULT_TOLERANCE_DEG;

/// From two found peaks to a drive list: planning of measurements on a single-crystal goniometer.
///
/// Without a verb the window opens, on a demo or on SESSION. Ringwright drives nothing: a list is a proposal, and
/// interlocks, the machine's own limits, the facility's rules and the responsible scientist decide.
#[derive(Debug, Parser)]
#[command(name = "ringwright", version, args_conflicts_with_subcommands = true, after_help = STATUS)]
pub struct Arguments {
    /// A session file to open in the window.
    pub session: Option<PathBuf>,
    /// A folder with more machine files for the window, looked through after those of the program and those beside the
    /// session.
    #[arg(long, value_name = "FOLDER")]
    pub machines: Option<PathBuf>,
    #[command(subcommand)]
    pub verb: Option<Verb>,
}

const STATUS: &str = "Exit status: 0 done, 1 the answer is no, 2 bad input.\n\nExample:\n  ringwright demo --headless\n  ringwright --machines our-machines night.ron";

#[derive(Debug, Subcommand)]
pub enum Verb {
    Orient(OrientArgs),
    Reach(ReachArgs),
    Azimuth(AzimuthArgs),
    Plan(PlanArgs),
    Verify(VerifyArgs),
    Demo(DemoArgs),
}

/// A session and where its machine may be.
#[derive(Debug, Args)]
pub struct SessionArgs {
    /// The session file.
    pub session: PathBuf,
    /// A folder with more machine files, looked through after those of the program and those beside the session.
    #[arg(long, value_name = "FOLDER")]
    pub machines: Option<PathBuf>,
}

/// Report what the peaks say about the orientation: U, UB, every misfit, and what to measure next.
///
/// Exit status 0 if the peaks agree with each other (also while a third one is still missing), 1 if they do not, 2 if they give
/// no orientation.
#[derive(Debug, Args)]
#[command(after_help = "Example:\n  ringwright orient night.ron --output night-oriented.ron")]
pub struct OrientArgs {
    #[command(flatten)]
    pub session: SessionArgs,
    /// Save the session with U in it to this file.
    #[arg(long, value_name = "FILE")]
    pub output: Option<PathBuf>,
}

/// Tell of every wanted reflection whether it can be measured, in which setting, and if not why: a CSV table.
///
/// Exit status 0 if any reflection is reachable, 1 if none is.
#[derive(Debug, Args)]
#[command(after_help = "Example:\n  ringwright reach night.ron --output reach.csv")]
pub struct ReachArgs {
    #[command(flatten)]
    pub session: SessionArgs,
    /// One row for each setting instead of one for each reflection.
    #[arg(long)]
    pub every_setting: bool,
    /// Write the table to this file instead of standard output.
    #[arg(long, value_name = "FILE")]
    pub output: Option<PathBuf>,
}

/// Turn one reflection about its own Q: the windows of the azimuth in which a setting is allowed, and where other
/// reflections cross.
///
/// Of the session's rules the one that settles the azimuth is left out: a rule that says so, else bisecting, a tie, or the
/// last hold. Exit status 0 if any azimuth is allowed, 1 if none is.
#[derive(Debug, Args)]
#[command(after_help = "Example:\n  ringwright azimuth night.ron --hkl 0,2,4 --at 30")]
pub struct AzimuthArgs {
    #[command(flatten)]
    pub session: SessionArgs,
    /// The reflection, three numbers.
    #[arg(long, value_name = "H,K,L", value_parser = triple, allow_hyphen_values = true)]
    pub hkl: Triple,
    /// What ψ counts from: h,k,l of a reciprocal direction, or u,v,w in square brackets of a direct one. If left out, that
    /// of the rules, else the crystal's surface, else 0,0,1.
    #[arg(long, value_name = "DIRECTION", value_parser = direction, allow_hyphen_values = true)]
    pub reference: Option<Reference>,
    /// Also list every setting at this azimuth.
    #[arg(long, value_name = "DEGREES", value_parser = azimuth_deg, allow_hyphen_values = true)]
    pub at: Option<f64>,
    /// Write the report to this file instead of standard output.
    #[arg(long, value_name = "FILE")]
    pub output: Option<PathBuf>,
}

/// Three numbers of a command line.
#[derive(Debug, Clone, Copy)]
pub struct Triple(pub [f64; 3]);

fn triple(text: &str) -> Result<Triple, String> {
    let numbers: Vec<f64> = text.split(',').filter_map(|part| part.trim().parse().ok()).collect();
    match (numbers.as_slice(), text.split(',').count()) {
        (&[h, k, l], 3) if [h, k, l].iter().all(|n| n.is_finite() && n.abs() <= 1.0e4) => Ok(Triple([h, k, l])),
        _ => Err("accepted are three numbers between -10000 and 10000 with commas, for example 1,0,-2".to_owned()),
    }
}

fn direction(text: &str) -> Result<Reference, String> {
    let direct = text.trim().strip_prefix('[').and_then(|rest| rest.strip_suffix(']'));
    let Triple([x, y, z]) = triple(direct.unwrap_or(text))?;
    let index = |value| Index::new(value).map_err(|error| error.to_string());
    let reference = match direct {
        Some(_) => Reference::Direct { u: index(x)?, v: index(y)?, w: index(z)? },
        None => Reference::Reciprocal { h: index(x)?, k: index(y)?, l: index(z)? },
    };
    if reference.has_direction() {
        Ok(reference)
    } else {
        Err("accepted are three numbers that are not all 0".to_owned())
    }
}

fn azimuth_deg(text: &str) -> Result<f64, String> {
    match text.parse::<f64>() {
        Ok(deg) if deg.abs() <= 360.0 => Ok(deg),
        _ => Err("accepted is an angle between -360 and 360 degrees".to_owned()),
    }
}

/// Write the drive list of every reachable reflection as CSV, in an order that saves driving.
///
/// Every row is checked by the forward equation, with the digits that are written. Exit status 0 if the list has rows, 1 if it has
/// none.
#[derive(Debug, Args)]
#[command(after_help = "Example:\n  ringwright plan night.ron --output night.csv")]
pub struct PlanArgs {
    #[command(flatten)]
    pub session: SessionArgs,
    /// Write the list to this file instead of standard output.
    #[arg(long, value_name = "FILE")]
    pub output: Option<PathBuf>,
}

/// Prove or reject each row of a drive list, whoever made it.
///
/// Checked are the direction of R U B h against Q, 2θ, the limits, the direct beam, and every drive from row to row with the
/// readings as they are written. Exit status 0 if every row is proven, 1 if any is rejected, if rows are missing, or if the
/// list carries the fingerprint of another session.
#[derive(Debug, Args)]
#[command(after_help = "Example:\n  ringwright verify night.ron night.csv")]
pub struct VerifyArgs {
    #[command(flatten)]
    pub session: SessionArgs,
    /// The drive list, a CSV file.
    pub list: PathBuf,
    /// How far direction and 2θ may be off, in degrees.
    #[arg(long, value_name = "DEGREES", default_value_t = DEFAULT_TOLERANCE_DEG, value_parser = tolerance)]
    pub tolerance: f64,
    /// Write the report to this file instead of standard output.
    #[arg(long, value_name = "FILE")]
    pub output: Option<PathBuf>,
}

/// Do the whole job on a session of ours: orientation, reach, drive list and its proof, then the window if there is a display.
///
/// The demos are `eulerian-orthorhombic` and `kappa-monoclinic`.
#[derive(Debug, Args)]
#[command(after_help = "Example:\n  ringwright demo kappa-monoclinic --headless --output my-night.ron")]
pub struct DemoArgs {
    /// Which demo; the first if left out.
    pub name: Option<String>,
    /// Do not open the window afterwards.
    #[arg(long)]
    pub headless: bool,
    /// Also write the demo's session file here, as a start for one of your own.
    #[arg(long, value_name = "FILE")]
    pub output: Option<PathBuf>,
}

fn tolerance(text: &str) -> Result<f64, String> {
    match text.parse::<f64>() {
        Ok(deg) if deg > 0.0 && deg <= 5.0 => Ok(deg),
        _ => Err("accepted is a number of degrees above 0, at most 5".to_owned()),
    }
}

#[cfg(test)]
mod tests {
    use clap::CommandFactory;

    use super::*;

    #[test]
    fn the_command_line_is_sound_and_every_help_has_an_example() {
        let mut command = Arguments::command();
        command.build();
        command.clone().debug_assert();
        for verb in command.get_subcommands().filter(|verb| verb.get_name() != "help") {
            let help = verb.clone().render_long_help().to_string();
            assert!(help.contains(&format!("Example:\n  ringwright {}", verb.get_name())), "{help}");
        }
    }
}
