//! Order a^0, the parton model: J. Bjorken, E. Paschos, Phys. Rev. 185 (1969) 1975; C. Callan, D. Gross, Phys. Rev.
//! Lett. 22 (1969) 156 for the absence of `FL`.

use super::{Coefficient, StructureFunction};
use crate::kernels::kernel::{Kernel, Term};

pub(super) fn kernel(function: StructureFunction, coefficient: Coefficient) -> Kernel {
    match (function, coefficient) {
        (StructureFunction::F2 | StructureFunction::F3, Coefficient::NsPlus | Coefficient::NsMinus) => {
            vec![Term::delta(1.0)].into()
        }
        _ => Kernel::default(),
    }
}
