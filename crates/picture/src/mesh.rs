use crate::vector::{V3, add, cross, dot, sub};

/// Why a mesh cannot be made.
#[derive(Debug, Clone, Copy, PartialEq, Eq, thiserror::Error)]
pub enum MeshError {
    /// A face names a corner that does not exist.
    #[error("face {face} uses corner {corner}, but the mesh has only {corners} corners, counted from 0")]
    NoSuchCorner {
        /// Which face, counted from 0.
        face: usize,
        /// The corner it names.
        corner: u32,
        /// How many there are.
        corners: usize,
    },
}

#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Facet {
    pub corners: [V3; 3],
    pub normals: [V3; 3],
}

/// A surface of triangles in its own coordinates, to be placed in a scene as often as wanted.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Mesh {
    facets: Vec<Facet>,
}

impl Mesh {
    /// Flat faces with visible edges.
    pub fn faceted(corners: &[[f64; 3]], faces: &[[u32; 3]]) -> Result<Self, MeshError> {
        Self::build(corners, faces, |_, [a, b, c]| [cross(sub(b, a), sub(c, a)); 3])
    }

    /// A round surface: normals are averaged at each corner, weighted by the area of its faces.
    pub fn smooth(corners: &[[f64; 3]], faces: &[[u32; 3]]) -> Result<Self, MeshError> {
        let flat = Self::faceted(corners, faces)?;
        let mut normals = vec![[0.0; 3]; corners.len()];
        for (face, facet) in faces.iter().zip(&flat.facets) {
            for &corner in face {
                if let Some(normal) = normals.get_mut(corner as usize) {
                    *normal = add(*normal, facet.normals[0]);
                }
            }
        }
        Self::build(corners, faces, |face, _| face.map(|c| normals.get(c as usize).copied().unwrap_or([0.0; 3])))
    }

    /// Number of triangles.
    pub fn len(&self) -> usize {
        self.facets.len()
    }

    /// Whether there are no triangles.
    pub fn is_empty(&self) -> bool {
        self.facets.is_empty()
    }

    pub(crate) fn facets(&self) -> &[Facet] {
        &self.facets
    }

    fn build(
        corners: &[V3],
        faces: &[[u32; 3]],
        normals: impl Fn(&[u32; 3], [V3; 3]) -> [V3; 3],
    ) -> Result<Self, MeshError> {
        let mut facets = Vec::with_capacity(faces.len());
        for (index, face) in faces.iter().enumerate() {
            let mut at = [[0.0; 3]; 3];
            for (place, &corner) in at.iter_mut().zip(face) {
                *place = *corners.get(corner as usize).ok_or(MeshError::NoSuchCorner {
                    face: index,
                    corner,
                    corners: corners.len(),
                })?;
            }
            facets.push(Facet { corners: at, normals: normals(face, at) });
        }
        Ok(Self { facets })
    }
}

/// A rotation followed by a shift: from a mesh's own coordinates to the world.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Placement {
    /// Rows of the rotation matrix.
    pub rotation_rows: [[f64; 3]; 3],
    /// Where the mesh's origin goes.
    pub shift: [f64; 3],
}

impl Default for Placement {
    fn default() -> Self {
        Self { rotation_rows: [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]], shift: [0.0; 3] }
    }
}

impl Placement {
    pub(crate) fn point(&self, point: V3) -> V3 {
        add(self.direction(point), self.shift)
    }

    pub(crate) fn direction(&self, direction: V3) -> V3 {
        self.rotation_rows.map(|row| dot(row, direction))
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn a_missing_corner_is_named() {
        let error = Mesh::faceted(&[[0.0; 3]; 3], &[[0, 1, 2], [0, 1, 3]]).unwrap_err();
        assert_eq!(error, MeshError::NoSuchCorner { face: 1, corner: 3, corners: 3 });
        assert!(error.to_string().contains("corner 3"));
    }

    #[test]
    fn placement_turns_then_shifts() {
        // A quarter turn about +z takes x to y.
        let placement =
            Placement { rotation_rows: [[0.0, -1.0, 0.0], [1.0, 0.0, 0.0], [0.0, 0.0, 1.0]], shift: [10.0, 0.0, 0.0] };
        assert_eq!(placement.point([1.0, 0.0, 0.0]), [10.0, 1.0, 0.0]);
        assert_eq!(placement.direction([1.0, 0.0, 0.0]), [0.0, 1.0, 0.0]);
    }

    #[test]
    fn smooth_normals_lie_between_the_faces() {
        // A ridge along y: faces tilted to −x and +x.
        let corners = [[0.0, 0.0, 0.0], [0.0, 1.0, 0.0], [-1.0, 0.0, -1.0], [1.0, 0.0, -1.0]];
        let mesh = Mesh::smooth(&corners, &[[0, 1, 2], [0, 3, 1]]).unwrap();
        let ridge = mesh.facets()[0].normals[0];
        assert!(ridge[0].abs() < 1e-12 && ridge[2] > 0.0);
        assert!(mesh.facets()[0].normals[2][0] < 0.0);
    }
}
