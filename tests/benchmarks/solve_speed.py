"""Assembly to 20 modes of a slotted fork, beside a plain stack and ngsolve.

All contenders solve the same second-order mesh on the same threads (as many as
OMP_NUM_THREADS says, else one less than there are cores), one at a time, each in its
own process; libraries are loaded before the clock starts. Prints seconds, ratios,
processor time, peak memory, and how far the frequencies are apart.

    python tests/benchmarks/solve_speed.py [UNKNOWNS ...]

- modewright, checked: also the mesh error of every mode, and the count of modes;
- plain: scikit-fem's ready-made vector element and forms, scipy's `eigsh` as it comes;
- ngsolve, scipy: order 2, its sparse Cholesky inside scipy's `eigsh`;
- ngsolve, own: order 2, its sparse Cholesky in its own block method (LOBPCG, a fixed
  number of steps, as it has no tolerance).
"""

from __future__ import annotations

import sys
from pathlib import Path

import _fork
import numpy as np
from modewright.fem.modal.threads import default_count

#: Relative tolerance of eigenvalue residuals, for all who take one.
TOLERANCE = 1e-7

#: Steps of ngsolve's own block method; fewer leave more than 1e-8.
STEPS = 12

#: Runs of each contender; the best counts.
RUNS = 3

#: Seconds after which a contender is stopped.
LIMIT = 600.0


def ours(path: str, threads: int) -> None:
    """Solve with modewright: assembly to modes, as the others."""
    _ours(path, threads, checked=False)


def ours_checked(path: str, threads: int) -> None:
    """Solve with modewright, with the mesh error of every mode and the count of modes."""
    _ours(path, threads, checked=True)


def _ours(path: str, threads: int, checked: bool) -> None:
    from modewright.fem.modal.spectrum import solve_spectrum
    from modewright.fem.modal.system import build_system

    mesh = _fork.read_mesh(path)
    clock = _fork.Clock()
    system = build_system(_fork.case(), mesh)
    clock.stage("assemble")
    found = solve_spectrum(
        system, modes=_fork.MODES, thread_count=threads, estimate=checked, count=checked
    )
    clock.seconds.update({k: v for k, v in found.seconds.items() if v > 1e-3})
    clock.report(found.frequencies, solver=found.direct_solver, unknowns=system.unknowns)


def plain(path: str, threads: int) -> None:
    """Solve with scikit-fem's ready-made vector forms and scipy's eigsh as it comes."""
    import skfem
    from scipy.sparse.linalg import eigsh
    from skfem.helpers import dot
    from skfem.models.elasticity import lame_parameters, linear_elasticity

    mesh = _fork.read_mesh(path)
    corners, numbers = np.unique(mesh.cells[:, :4], return_inverse=True)
    body = skfem.MeshTet(mesh.points[corners].T.copy(), numbers.reshape(-1, 4).T.copy())
    steel = _fork.STEEL
    clock = _fork.Clock()
    basis = skfem.Basis(body, skfem.ElementVector(skfem.ElementTetP2()))
    parameters = lame_parameters(steel.youngs_modulus, steel.poisson_ratio)
    stiffness = linear_elasticity(*parameters).assemble(basis)
    mass = skfem.BilinearForm(lambda u, v, w: steel.density * dot(u, v)).assemble(basis)
    fixed = basis.get_dofs(lambda x: x[0] < 1e-9).all()
    free = np.setdiff1d(np.arange(basis.N), fixed)
    k, m = stiffness[free][:, free].tocsc(), mass[free][:, free].tocsc()
    clock.stage("assemble")
    values = np.sort(eigsh(k, _fork.MODES, m, sigma=0.0)[0])
    clock.stage("solve")
    clock.report(np.sqrt(values) / (2 * np.pi))


def ngsolve_scipy(path: str, threads: int) -> None:
    """Solve with ngsolve's forms and sparse Cholesky inside scipy's eigsh."""
    _ngsolve(path, threads, own=False)


def ngsolve_own(path: str, threads: int) -> None:
    """Solve with ngsolve alone."""
    _ngsolve(path, threads, own=True)


def _ngsolve(path: str, threads: int, own: bool) -> None:
    import ngsolve as ng
    from ngsolve.eigenvalues import LOBPCG
    from scipy.sparse.linalg import LinearOperator, eigsh

    body = ng.Mesh(_netgen(_fork.read_mesh(path)))
    steel = _fork.STEEL
    e, nu = steel.youngs_modulus, steel.poisson_ratio
    mu, lam = e / (2 * (1 + nu)), e * nu / ((1 + nu) * (1 - 2 * nu))
    ng.SetNumThreads(threads)
    with ng.TaskManager():
        clock = _fork.Clock()
        space = ng.VectorH1(body, order=2, dirichlet="root")
        u, v = space.TnT()

        def strain(w):
            return ng.Sym(ng.Grad(w))

        elastic = ng.BilinearForm(
            (2 * mu * ng.InnerProduct(strain(u), strain(v)) + lam * ng.div(u) * ng.div(v)) * ng.dx,
            symmetric=True,
        ).Assemble()
        inertia = ng.BilinearForm(
            steel.density * ng.InnerProduct(u, v) * ng.dx, symmetric=True
        ).Assemble()
        clock.stage("assemble")
        inverse = elastic.mat.Inverse(space.FreeDofs(), inverse="sparsecholesky")
        clock.stage("factor")
        if own:
            values, _ = LOBPCG(
                elastic.mat,
                inertia.mat,
                pre=inverse,
                num=_fork.MODES,
                maxit=STEPS,
                printrates=False,
            )
            values = np.sort(np.array(values))
        else:
            right, left = elastic.mat.CreateColVector(), elastic.mat.CreateColVector()
            free = np.array(list(space.FreeDofs()), bool)
            n = len(free)

            def apply(matrix):
                def multiply(x):
                    right.FV().NumPy()[:] = np.where(free, x.ravel(), 0.0)
                    left.data = matrix * right
                    return np.where(free, left.FV().NumPy(), 0.0)

                return LinearOperator((n, n), matvec=multiply, dtype=float)

            values = eigsh(
                apply(elastic.mat),
                _fork.MODES,
                apply(inertia.mat),
                sigma=0.0,
                OPinv=apply(inverse),
                tol=TOLERANCE,
                v0=np.where(free, np.random.default_rng(0).standard_normal(n), 0.0),
            )[0]
            values = np.sort(values)
        clock.stage("eigen")
        clock.report(np.sqrt(values) / (2 * np.pi))


def _netgen(mesh):
    """Return the same cells as a netgen mesh; the fork's faces are flat, its cells straight."""
    from netgen import meshing
    from netgen.csg import Pnt

    corners, numbers = np.unique(mesh.cells[:, :4], return_inverse=True)
    cells = numbers.reshape(-1, 4)
    number = np.full(len(mesh.points), -1)
    number[corners] = np.arange(len(corners))
    out = meshing.Mesh(dim=3)
    ids = [out.Add(meshing.MeshPoint(Pnt(*p))) for p in mesh.points[corners]]
    out.Add(meshing.FaceDescriptor(surfnr=1, domin=1, bc=1))
    out.Add(meshing.FaceDescriptor(surfnr=2, domin=1, bc=2))
    root = np.zeros(len(mesh.facets), bool)
    root[mesh.faces["root"]] = True
    for corner, held in zip(number[mesh.facets[:, :3]], root, strict=True):
        out.Add(meshing.Element2D(1 if held else 2, [ids[i] for i in corner]))
    for corner in cells:
        # netgen counts the corners of a tetrahedron the other way round.
        out.Add(meshing.Element3D(1, [ids[i] for i in corner[[0, 2, 1, 3]]]))
    out.SetBCName(0, "root")
    out.SetBCName(1, "rest")
    return out


CONTENDERS = {
    "modewright": ours,
    "modewright, checked": ours_checked,
    "plain": plain,
    "ngsolve, scipy": ngsolve_scipy,
    "ngsolve, own": ngsolve_own,
}


def main(wanted: list[int]) -> None:
    """Run all contenders on each size and print a table."""
    threads = default_count()
    say = sys.stdout.write
    for unknowns in wanted:
        with _fork.scratch() as folder:
            path = Path(folder) / "fork.npz"
            _fork.write_mesh(_fork.SIZES[unknowns], path)
            best: dict[str, dict] = {}
            for run in range(RUNS):
                for name in CONTENDERS:
                    # The plain stack takes minutes; once will do, and not beyond 50k.
                    if name == "plain" and (run or unknowns > 60_000):
                        continue
                    if run and name not in best:
                        continue
                    got = _fork.contend(__file__, name, path, threads, LIMIT)
                    if got and (name not in best or got["total"] < best[name]["total"]):
                        best[name] = got
        first = best["modewright"]
        say(
            f"\nfork, {first['unknowns']} unknowns, {_fork.MODES} modes, {threads} threads, "
            f"best of {RUNS}\n"
        )
        heads = ("total s", "ratio", "cpu s", "peak MB", "off by")
        say(f"{'':19}" + "".join(f" {head:>8}" for head in heads) + "  stages, s\n")
        reference = np.array(first["frequencies"][: _fork.MODES])
        for name, got in best.items():
            off = np.abs(np.array(got["frequencies"][: _fork.MODES]) / reference - 1).max()
            stages = ", ".join(f"{stage} {s:.2f}" for stage, s in got["seconds"].items())
            say(
                f"{name:19} {got['total']:8.2f} {got['total'] / first['total']:8.1f} "
                f"{got['processor']:8.2f} {got['peak_mb']:8.0f} {off:8.1e}  {stages}\n"
            )


if __name__ == "__main__":
    if sys.argv[1:2] == ["--run"]:
        CONTENDERS[sys.argv[2]](sys.argv[3], int(sys.argv[4]))
    else:
        main([int(a) for a in sys.argv[1:]] or [50_000, 150_000])
