//! Every family at any composition and temperature: sound, smooth, and dark below its gap.

use std::sync::{Arc, OnceLock};

use bandloom::materials::alloy::{Composition, Family};
use bandloom::materials::optics::{EV_M, Optics};
use bandloom::materials::{Material, library};
use bandloom::resolve::materials::{Definition, Library};
use bandloom::resolve::quantities::Scope;
use proptest::prelude::*;

/// Every built-in family.
fn families() -> &'static [Arc<Family>] {
    static FAMILIES: OnceLock<Vec<Arc<Family>>> = OnceLock::new();
    FAMILIES.get_or_init(|| {
        let (mut library, mut scope) = (Library::new(), Scope::new());
        library::FILES
            .iter()
            .filter_map(|(name, _)| match library.find(name, &mut scope) {
                Some(Definition::Family(family)) => Some(family),
                _ => None,
            })
            .collect()
    })
}

/// Random numbers to fractions that sum to 1 on each sublattice; the corners come up as well.
fn composition(family: &Family, numbers: &[f64]) -> Composition {
    let mut numbers = numbers.iter().copied();
    let mut site = |count: usize| {
        let drawn: Vec<f64> = (0..count).map(|_| numbers.next().unwrap_or(0.5)).collect();
        let sum: f64 = drawn.iter().sum();
        if sum <= 0.0 {
            return (0..count).map(|at| f64::from(u8::from(at == 0))).collect();
        }
        drawn.iter().map(|share| share / sum).collect::<Vec<f64>>()
    };
    [site(family.sites[0].len()), site(family.sites[1].len())]
}

fn towards(from: &Composition, to: &Composition, share: f64) -> Composition {
    [0, 1].map(|site| from[site].iter().zip(&to[site]).map(|(a, b)| a + share * (b - a)).collect())
}

fn gap(material: &Material, temperature_k: f64) -> f64 {
    material.gap(temperature_k).expect("every family has bands").ev
}

fn share() -> impl Strategy<Value = f64> {
    prop_oneof![1 => Just(0.0), 6 => 0.0..1.0_f64]
}

/// A step in composition that is a third of what growth can hold, plain fraction.
const STEP: f64 = 1e-3;

proptest! {
    #![proptest_config(ProptestConfig { cases: 400, failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn a_family_is_sound_smooth_and_dark_below_its_gap(
        at in 0_usize..1000,
        drawn in prop::collection::vec(share(), 6),
        other in prop::collection::vec(share(), 6),
        temperature_k in 77.0..400.0_f64,
        nm in 285.0..1900.0_f64,
    ) {
        let family = &families()[at % families().len()];
        let here = composition(family, &drawn);
        let near = towards(&here, &composition(family, &other), STEP);
        let (material, beside) = (family.at(&here, None), family.at(&near, None));
        let name = format!("{} {}", family.name, material.label);

        let own = gap(&material, temperature_k);
        prop_assert!(own.is_finite() && own > 0.0 && own < 4.0, "{name}: {own} eV");
        // Slopes reach some 5 eV a unit of fraction, with bowing.
        prop_assert!((gap(&beside, temperature_k) - own).abs() < 8.0 * STEP, "{name}: the gap steps");
        prop_assert!((gap(&material, temperature_k + 0.1) - own).abs() < 2e-4, "{name}: the gap steps with T");
        if let Some(lattice) = material.lattice_constant(temperature_k) {
            let next = beside.lattice_constant(temperature_k).expect("as its neighbour");
            prop_assert!((5.3..6.6).contains(&lattice), "{name}: {lattice} Å");
            prop_assert!((next - lattice).abs() < 1.2 * STEP, "{name}: the lattice steps");
        }
        let Optics::Table(_) = material.optics else { return Ok(()) };
        let index = |of: &Material, nm: f64| of.index(nm * 1e-9, temperature_k).expect("an index");
        let (n, k) = index(&material, nm);
        prop_assert!(n.is_finite() && k.is_finite() && k >= 0.0 && (0.4..8.0).contains(&n), "{name}: {n} {k}");
        let (next_n, next_k) = index(&beside, nm);
        prop_assert!((n - next_n).abs() < 0.1 && (k - next_k).abs() < 0.1,
            "{name} at {nm} nm: ({n}, {k}) becomes ({next_n}, {next_k}) at {}", beside.label);
        let (next_n, next_k) = index(&material, nm + 0.1);
        prop_assert!((n - next_n).abs() < 0.05 && (k - next_k).abs() < 0.05,
            "{name} at {nm} nm: ({n}, {k}) steps to ({next_n}, {next_k})");
        // Of the steepest tail there is left less than a millionth of the edge.
        let below = own - 0.3;
        if below > 0.1 {
            let alpha = material.absorption(EV_M / below, temperature_k) / 100.0;
            prop_assert!(alpha < 0.01, "{name}: {alpha} /cm at {below} eV and {temperature_k} K, gap {own}");
        }
    }
}
