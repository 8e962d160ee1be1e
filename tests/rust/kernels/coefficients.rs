use crate::moments::{moment, power};
use scalewright_core::kernels::coefficients::{self, Coefficient, StructureFunction};
#[test]
fn look() {
    for order in 0..=3 { for sf in StructureFunction::ALL { for c in Coefficient::ALL { 
        for n in [1.0, 2.0, 3.0, 4.0, 6.0, 8.0, 10.0] {
            let k = coefficients::kernel(order, sf, c);
            if k.is_zero() || (n == 1.0 && matches!(c, Coefficient::Gluon|Coefficient::PureSinglet)) {continue;}
            let m: Vec<f64> = (0..k.terms.len()).map(|p| moment(&power(&k, p), n, 0.0)).collect();
            println!("{order} {} {} N={n} {m:?}", sf.name(), c.name());
    }}}}
}
