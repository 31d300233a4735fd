use super::{Instrument, MachineDescription};

/// Machines that are part of the program: file name without its ending, and the text of the file.
pub const BUILT_IN_MACHINES: [(&str, &str); 8] = [
    ("eulerian-four-circle", include_str!("../../../../assets/instruments/eulerian-four-circle.ron")),
    ("kappa-four-circle", include_str!("../../../../assets/instruments/kappa-four-circle.ron")),
    ("fixed-chi-three-circle", include_str!("../../../../assets/instruments/fixed-chi-three-circle.ron")),
    ("eulerian-four-circle-vertical", include_str!("../../../../assets/instruments/eulerian-four-circle-vertical.ron")),
    ("kappa-four-circle-vertical", include_str!("../../../../assets/instruments/kappa-four-circle-vertical.ron")),
    ("six-circle", include_str!("../../../../assets/instruments/six-circle.ron")),
    ("lifting-counter", include_str!("../../../../assets/instruments/lifting-counter.ron")),
    ("spindle-with-arcs", include_str!("../../../../assets/instruments/spindle-with-arcs.ron")),
];

/// A machine of the program by its name, ready for use; nothing if there is none of that name. That every built-in file
/// passes every check is held by a test.
pub fn built_in_machine(name: &str) -> Option<Instrument> {
    let (_, text) = BUILT_IN_MACHINES.iter().find(|(known, _)| *known == name)?;
    let description: MachineDescription = ron::from_str(text).ok()?;
    Instrument::new(description).ok()
}

#[cfg(test)]
#[allow(clippy::unwrap_used)]
mod tests {
    use super::*;

    #[test]
    fn every_built_in_machine_loads() {
        for (name, text) in BUILT_IN_MACHINES {
            let description: MachineDescription = ron::from_str(text).unwrap_or_else(|e| panic!("{name}: {e}"));
            Instrument::new(description).unwrap_or_else(|e| panic!("{name}: {e}"));
        }
    }
}
