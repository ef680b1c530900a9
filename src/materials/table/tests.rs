use super::*;

#[test]
fn tables_are_read_with_and_without_head_and_k() {
    let table = read("nm,n,k\n400,2.5,0.1\n500,2.4,0\n").expect("a table");
    assert_eq!((table.wavelength_m[0], table.k[0]), (400.0 * 1e-9, 0.1));
    let table = read("# film\r\num;n\r\n0.4;1.5\r\n").expect("a table");
    assert_eq!((table.wavelength_m[0], table.n[0], table.k[0]), (0.4 * 1e-6, 1.5, 0.0));
    let table = read("400 2.5 0.1\n500 2.4 0\n").expect("a table");
    assert_eq!((table.wavelength_m[1], table.n[1]), (500.0 * 1e-9, 2.4));
}

#[test]
fn every_kind_of_column_makes_n_and_k() {
    // ε = (2 + 0.5 i)² = 3.75 + 2 i.
    let table = read("eV,eps1,eps2\n2,3.75,2\n3,4,0\n").expect("a table");
    assert!((table.n[1] - 2.0).abs() < 1e-12 && (table.k[1] - 0.5).abs() < 1e-12);
    assert!((table.wavelength_m[1] - EV_M / 2.0).abs() < 1e-15);
    assert_eq!((table.n[0], table.k[0]), (2.0, 0.0));
    // α = 1e4 /cm at 500 nm: k = α λ / 4π = 0.039789.
    let reading = read_all("nm,alpha (1/cm)\n500,1e4\n600,0\n", Some(2.5));
    let table = reading.table.expect("a table");
    assert!((table.k[0] - 0.039_788_735_8).abs() < 1e-9 && table.n == [2.5, 2.5]);
    // A metal: ε = −9, n 0, k 3, and n has to be above 0 nowhere but in a column of its own.
    let table = read("nm,eps1,eps2\n500,-9,1e-3\n600,-12,1e-3\n").expect("a table");
    assert!((table.k[0] - 3.0).abs() < 1e-6);
}

#[test]
fn rows_may_count_down_but_not_jump() {
    let reading = read_all("nm,n\n600,1.4\n500,1.5\n400,1.6\n", None);
    assert!(reading.reversed && reading.faults.is_empty());
    let table = reading.table.expect("a table");
    assert_eq!(table.n, [1.6, 1.5, 1.4]);
    assert_eq!(reading.rows[0], (21, 28));
    // Rising energies are the usual way, and no reversal.
    assert!(!read_all("eV,n\n1,1.4\n2,1.5\n", None).reversed);
    let faults = read_all("nm,n\n400,1.6\n500,1.5\n500,1.5\n450,1.5\n600,1.4\n", None).faults;
    assert_eq!(faults.len(), 2);
    assert!(faults[0].message.starts_with("500 stands twice"), "{}", faults[0].message);
    assert!(faults[1].message.starts_with("450 does not follow 500"), "{}", faults[1].message);
}

#[test]
fn unsound_tables_say_where() {
    let wrong = |text: &str| read(text).expect_err("unsound");
    let error = wrong("nm,n,k\n400,2.5,0\n390,2.4,0\n410,2.4,0\n");
    assert_eq!((error.start, error.end), (17, 26));
    assert!(error.message.starts_with("390 does not follow 400"));
    let text = "nm,n,k\n400,abc,0\n";
    let error = wrong(text);
    assert!(error.message.contains("n is no number: `abc`"));
    assert_eq!(&text[error.start..error.end], "abc");
    assert!(wrong("nm,n,k\n400,1.5,-0.1\n").message.contains("k is -0.1"));
    assert!(wrong("nm,n,k\n400,-1.5,0\n").message.contains("n is -1.5"));
    assert!(wrong("inch,n,k\n1,1.5,0\n").message.contains("`inch` is no unit"));
    assert!(wrong("400,1.5,nan\n").message.contains("k is no number"));
    assert!(wrong("nan,1.5,0\n").message.contains("wavelength is no number"));
    assert!(wrong("nm,n,k\n400,,0\n").message.contains("n is missing"));
    assert!(wrong("nm,n,k\n400,1,5,0\n").message.contains("4 cells, and 3 are due"));
    assert!(wrong("um,n,k\n4000,1.5,0\n").message.contains("4000 cannot be a wavelength"));
    assert!(wrong("nm,n,k\n400,46,0\n").message.contains("n is 46"));
    assert!(wrong("").message.contains("no row"));
    assert!(wrong("nm,n,k\n").message.contains("no row"));
}

#[test]
fn each_row_is_one_fault_and_a_hopeless_file_is_soon_given_up() {
    let two = read_all("nm,n,k\n400,x,y\n500,1.5,0\n600,1.4,-1\n", None);
    assert_eq!(two.faults.len(), 2);
    assert!(two.table.is_none());
    let many: String = (0..100).map(|row| format!("{row},x,0\n")).collect();
    assert_eq!(read_all(&many, None).faults.len(), MOST_FAULTS);
}
