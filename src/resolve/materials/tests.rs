use super::*;
use crate::materials::OriginKind;

#[test]
fn every_library_file_is_read_without_a_finding() {
    let mut library = Library::new();
    for (name, text) in library::FILES {
        let mut scope = Scope::new();
        assert!(library.read_built_in(name, text, &mut scope).is_some(), "{name}");
        let findings = scope.take_findings();
        assert!(findings.is_empty(), "{name}: {findings:#?}");
    }
}

#[test]
fn every_group_of_the_library_says_where_it_comes_from() {
    let mut library = Library::new();
    for (name, _) in library::FILES {
        let origins = match library.find(name, &mut Scope::new()).expect("a definition") {
            Definition::Compound(compound) => compound.material.origins.clone(),
            Definition::Family(family) => family.origins.clone(),
        };
        assert!(!origins.is_empty(), "{name}");
        for origin in origins {
            assert!(origin.kind != OriginKind::Stated, "{name}: `{}` has no kind", origin.what);
            assert!(origin.cite.len() > 20, "{name}: {}", origin.cite);
        }
    }
}
