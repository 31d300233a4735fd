//! Frames, signs and units: one set for the core, the files, the window and the tests.
//!
//! **Units.** Lengths of the crystal and wavelengths in Å, energies in keV (X-rays) or meV (neutrons), instrument
//! dimensions in mm, times in s. Angles are degrees wherever a person or a file sees them (`…_deg`) and radians inside
//! (`…_rad`). Reciprocal space has no 2π: |k| = 1/λ, |G| = 1/d.
//!
//! **Frames** (all right-handed).
//!
//! | frame | axes | from it to the next |
//! | --- | --- | --- |
//! | crystal Cartesian | x ∥ a\*, y in the a\*b\* plane with y·b\* > 0, z ∥ c (Busing & Levy 1967, Acta Cryst. 22, 457) | B takes hkl into it |
//! | head | fixed to the innermost sample axis; equals the lab frame when every sample axis is at angle zero | U takes crystal Cartesian into it |
//! | lab | +z along the beam, downstream; +y up; +x to the left of someone looking downstream (the laboratory frame of NeXus) | R takes head into it |
//!
//! **Stacks.** Sample axes are listed from the base to the crystal, R = R₁(t₁) R₂(t₂) … Rₙ(tₙ); detector axes from the base
//! to the detector, k_f = D₁(d₁) … Dₘ(dₘ) ẑ / λ. Every axis is a unit vector in the lab frame, written for the position
//! where all axes are at angle zero; a positive angle is a right-handed rotation about it.
//!
//! **Dial and angle.** Files, tables and people see dial *readings*; angle = reading − zero offset; only angles enter R
//! and D. A solution t stands for t + 360°k.
//!
//! **Diffraction.** Q = k_f − k_i and R U B h = Q with |k_i| = |k_f| = 1/λ; hence |Q| = 1/d, λ = 2 d sin θ, and a node with
//! |G| > 2/λ is never reachable.
//!
//! **Rejected school.** Many libraries put x along a instead of a\* when they orthogonalise; the metric is the same, the
//! orientation matrix is not. Busing & Levy's own instrument turns ω, φ and 2θ left-handed about "up": in our frame its
//! axes are (0, −1, 0) for these three and (0, 0, 1) for χ.
