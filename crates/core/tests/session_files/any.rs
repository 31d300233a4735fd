//! Every session there can be, each number up to the ends of what its type takes.

use std::collections::BTreeMap;
use std::fmt::Debug;

use proptest::collection::{btree_map, vec};
use proptest::option::of;
use proptest::prelude::*;
use ringwright_core::aim::{Preference, Reference, Rule};
use ringwright_core::crystal::{Centring, SymmetryQuery};
use ringwright_core::instrument::{
    Approach, AxisDescription, AxisName, Inclined, Interval, Limits, MachineDescription,
};
use ringwright_core::quantity::{
    AngleUncertainty, CellAngle, Component, ConeAngle, Degrees, Duration, EnergyInKev, EnergyInMev, Inclination, Index,
    Length, Overshoot, Speed, WavelengthInAngstrom,
};
use ringwright_core::radiation::{Radiation, emission_lines};
use ringwright_core::session::{
    CellDocument, CrystalDocument, FormatVersion, MachineChoice, OrientationDocument, PeakDocument, Session,
    TargetNode, Targets,
};

/// Numbers that a quantity takes: the ends, the smallest, the awkward and any in between.
fn quantity<Q: TryFrom<f64> + Debug>(low: f64, high: f64) -> BoxedStrategy<Q> {
    let awkward = [
        low,
        high,
        0.0,
        -0.0,
        5e-324,
        f64::MIN_POSITIVE,
        0.1 + 0.2,
        1.0 / 3.0,
        1e-7,
        1.0,
        90.0,
        low.next_up(),
        high.next_down(),
    ];
    let awkward: Vec<f64> = awkward.into_iter().filter(|x| Q::try_from(*x).is_ok()).collect();
    let number = prop_oneof![
        3 => low..=high,
        1 => proptest::sample::select(awkward),
        // Any exponent there is, folded into the range.
        1 => any::<f64>().prop_map(move |x| low + x.abs() % (high - low)),
        2 => (0..100_000_i32).prop_map(move |n| low + (high - low) * f64::from(n) / 100_000.0),
    ];
    number.prop_filter_map("outside the range of the quantity", |x| Q::try_from(x).ok()).boxed()
}

fn degrees() -> BoxedStrategy<Degrees> {
    quantity(-3600.0, 3600.0)
}

fn length() -> BoxedStrategy<Length> {
    quantity(0.1, 1e4)
}

fn index() -> BoxedStrategy<Index> {
    quantity(-1e4, 1e4)
}

fn component() -> BoxedStrategy<Component> {
    quantity(-1e6, 1e6)
}

/// Texts with everything that a quote could stumble over.
fn text() -> impl Strategy<Value = String> {
    prop_oneof!["[ -~]{0,20}", any::<String>(), Just("\"quoted\" // \\ /* \u{0} \r\n\t µÅ°".to_owned())]
}

fn axis_name() -> impl Strategy<Value = AxisName> {
    "[a-zA-Z][a-zA-Z0-9_]{0,23}".prop_filter_map("reserved", |name| AxisName::new(name).ok())
}

fn readings() -> impl Strategy<Value = BTreeMap<AxisName, Degrees>> {
    btree_map(axis_name(), degrees(), 0..5)
}

fn cell() -> impl Strategy<Value = CellDocument> {
    let angle = || quantity::<CellAngle>(0.0, 180.0);
    (length(), length(), length(), angle(), angle(), angle()).prop_map(|(a, b, c, alpha, beta, gamma)| CellDocument {
        a_angstrom: a,
        b_angstrom: b,
        c_angstrom: c,
        alpha_deg: alpha,
        beta_deg: beta,
        gamma_deg: gamma,
    })
}

fn symmetry() -> impl Strategy<Value = SymmetryQuery> {
    prop_oneof![
        text().prop_map(SymmetryQuery::SpaceGroup),
        any::<u16>().prop_map(SymmetryQuery::Number),
        text().prop_map(SymmetryQuery::Hall),
        proptest::sample::select(Centring::ALL.to_vec()).prop_map(SymmetryQuery::Centring),
    ]
}

fn radiation() -> impl Strategy<Value = Radiation> {
    let wavelength = || quantity::<WavelengthInAngstrom>(0.01, 100.0);
    prop_oneof![
        proptest::sample::select(emission_lines().to_vec()).prop_map(|name| Radiation::XrayLine { name }),
        quantity::<EnergyInKev>(0.1, 1300.0).prop_map(|kev| Radiation::XrayEnergy { kev }),
        wavelength().prop_map(|angstrom| Radiation::XrayWavelength { angstrom }),
        wavelength().prop_map(|angstrom| Radiation::NeutronWavelength { angstrom }),
        quantity::<EnergyInMev>(0.01, 1e6).prop_map(|mev| Radiation::NeutronEnergy { mev }),
    ]
}

fn limits() -> impl Strategy<Value = Limits> {
    let interval = (degrees(), degrees()).prop_map(|(from_deg, to_deg)| Interval { from_deg, to_deg });
    prop_oneof![Just(Limits::Endless), vec(interval, 0..3).prop_map(Limits::Intervals)]
}

fn approach() -> impl Strategy<Value = Approach> {
    (any::<bool>(), quantity::<Overshoot>(0.0, 45.0)).prop_map(|(up, overshoot_deg)| match up {
        true => Approach::Upward { overshoot_deg },
        false => Approach::Downward { overshoot_deg },
    })
}

fn inclined() -> impl Strategy<Value = Inclined> {
    let towards = (component(), component(), component());
    (towards, quantity::<Inclination>(0.0, 180.0)).prop_map(|(towards, by_deg)| Inclined { towards, by_deg })
}

fn axis() -> impl Strategy<Value = AxisDescription> {
    let times = (quantity::<Speed>(0.0, 1000.0), quantity::<Duration>(0.0, 1e7));
    let direction = ((component(), component(), component()), of(inclined()));
    let rest = (degrees(), degrees(), of(approach()), any::<bool>());
    (axis_name(), direction, limits(), times, rest).prop_map(|(name, direction, limits, times, rest)| AxisDescription {
        name,
        direction: direction.0,
        inclined: direction.1,
        limits,
        speed_deg_per_s: times.0,
        overhead_s: times.1,
        zero_offset_deg: rest.0,
        park_deg: rest.1,
        approach: rest.2,
        set_by_hand: rest.3,
    })
}

fn machine() -> impl Strategy<Value = MachineChoice> {
    let axes = (vec(axis(), 0..3), vec(axis(), 0..3));
    let description = (text(), text(), axes, of(axis_name()), quantity::<ConeAngle>(0.0, 90.0)).prop_map(
        |(name, note, (sample_axes, detector_axes), spindle, cone)| MachineDescription {
            version: ringwright_core::instrument::FormatVersion::CURRENT,
            name,
            note,
            sample_axes,
            detector_axes,
            spindle,
            direct_beam_half_angle_deg: cone,
        },
    );
    prop_oneof![text().prop_map(MachineChoice::Named), description.prop_map(MachineChoice::Inline)]
}

fn peak() -> impl Strategy<Value = PeakDocument> {
    let extra = (of(quantity::<AngleUncertainty>(0.0, 45.0)), of(quantity::<Duration>(0.0, 1e7)), any::<bool>());
    ((index(), index(), index()), readings(), extra).prop_map(|((h, k, l), readings_deg, extra)| PeakDocument {
        h,
        k,
        l,
        readings_deg,
        uncertainty_deg: extra.0,
        time_s: extra.1,
        ignored: extra.2,
    })
}

fn rule() -> impl Strategy<Value = Rule> {
    prop_oneof![
        Just(Rule::Bisecting),
        Just(Rule::EqualIncidenceAndExit),
        axis_name().prop_map(|axis| Rule::BisectingAbout { axis }),
        (axis_name(), degrees()).prop_map(|(axis, at_deg)| Rule::Hold { axis, at_deg }),
        (reference(), degrees()).prop_map(|(reference, at_deg)| Rule::Azimuth { reference, at_deg }),
        degrees().prop_map(|at_deg| Rule::Incidence { at_deg }),
        degrees().prop_map(|at_deg| Rule::Exit { at_deg }),
        (axis_name(), axis_name(), component(), degrees()).prop_map(|(axis, to, factor, offset_deg)| Rule::Tie {
            axis,
            to,
            factor,
            offset_deg
        }),
        degrees().prop_map(|turned_deg| Rule::DiffractionPlane { turned_deg }),
        reference().prop_map(|reference| Rule::Freest { reference }),
    ]
}

fn reference() -> impl Strategy<Value = Reference> {
    prop_oneof![
        (index(), index(), index()).prop_map(|(h, k, l)| Reference::Reciprocal { h, k, l }),
        (index(), index(), index()).prop_map(|(u, v, w)| Reference::Direct { u, v, w }),
    ]
}

fn preference() -> impl Strategy<Value = Preference> {
    prop_oneof![
        Just(Preference::FarthestFromLimits),
        readings().prop_map(|readings_deg| Preference::NearestTo { readings_deg })
    ]
}

fn targets() -> impl Strategy<Value = Targets> {
    let node = (index(), index(), index()).prop_map(|(h, k, l)| TargetNode { h, k, l });
    prop_oneof![
        (length(), of(length()), any::<bool>()).prop_map(|(min_angstrom, max_angstrom, with_absent)| {
            Targets::SpacingRange { min_angstrom, max_angstrom, with_absent }
        }),
        (of(degrees()), degrees(), any::<bool>())
            .prop_map(|(min_deg, max_deg, with_absent)| { Targets::TwoThetaRange { min_deg, max_deg, with_absent } }),
        vec(node, 0..30).prop_map(Targets::List),
    ]
}

fn orientation() -> impl Strategy<Value = OrientationDocument> {
    let row = || (component(), component(), component());
    ((row(), row(), row()), any::<bool>()).prop_map(|(u, confirmed)| OrientationDocument { u, confirmed })
}

pub fn session() -> impl Strategy<Value = Session> {
    let crystal = (text(), cell(), symmetry(), of(reference()));
    let crystal = crystal.prop_map(|(name, cell, symmetry, surface)| CrystalDocument { name, cell, symmetry, surface });
    let wishes = (vec(rule(), 0..4), preference(), targets(), of(orientation()));
    (text(), crystal, radiation(), machine(), vec(peak(), 0..5), wishes).prop_map(
        |(title, crystal, radiation, machine, peaks, (rules, preference, targets, orientation))| Session {
            version: FormatVersion::CURRENT,
            title,
            crystal,
            radiation,
            machine,
            peaks,
            rules,
            preference,
            targets,
            orientation,
        },
    )
}
