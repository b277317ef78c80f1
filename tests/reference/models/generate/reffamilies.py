"""Families beyond the plain Poisson, on the ground that refcore.py lays; the same precision and ways."""
from refcore import *
# ---------------------------------------------------------------- other families
_tab = {}
def sumlog(alpha, y):
    if y > 3000: return mp.loggamma(y+1/alpha)-mp.loggamma(1/alpha)+y*mp.log(alpha)
    t = _tab.get(alpha)
    if t is None:
        if len(_tab) > 64: _tab.clear()
        t = _tab[alpha] = [M(0)]
    while len(t) <= y: t.append(t[-1]+mp.log(1+alpha*(len(t)-1)))
    return t[y]
_lf = [M(0)]
def lfact(y):
    if y > 3000: return mp.loggamma(M(y)+1)
    while len(_lf) <= y: _lf.append(_lf[-1]+mp.log(len(_lf)))
    return _lf[y]
_ex = {}
def cexp(a):
    v = _ex.get(a)
    if v is None:
        if len(_ex) > 64: _ex.clear()
        v = _ex[a] = mp.exp(a)
    return v
def l_pois(y, e): return y*e-mp.exp(e)-lfact(y)
def l_nb2(y, e, a):
    al = cexp(a); m = mp.exp(e); return sumlog(al, y)+y*e-(y+1/al)*mp.log(1+al*m)-lfact(y)
def l_nb1(y, e, a):
    d = cexp(a); m = mp.exp(e); v = M(0)
    for j in range(y): v += mp.log(m+j*d)
    return v-(y+m/d)*mp.log(1+d)-lfact(y)
def l_nbp(y, e, a, P):
    al = cexp(a); m = mp.exp(e); r = m**(2-P)/al; v = M(0)
    for j in range(y): v += mp.log(r+j)
    return v - r*mp.log(1+m/r) + y*mp.log(m/(r+m)) - lfact(y)
def lg1(z): return -mp.log(1+mp.exp(-z))      # log expit
def l_zip(y, e, z):
    if y == 0: return mp.log(mp.exp(z)+mp.exp(-mp.exp(e)))-mp.log(1+mp.exp(z))
    return -mp.log(1+mp.exp(z))+l_pois(y, e)
def l_zinb(y, e, z, a):
    if y == 0: return mp.log(mp.exp(z)+mp.exp(l_nb2(0, e, a)))-mp.log(1+mp.exp(z))
    return -mp.log(1+mp.exp(z))+l_nb2(y, e, a)
def l_hurp(y, e, z):
    if y == 0: return -mp.log(1+mp.exp(z))
    return lg1(z)+l_pois(y, e)-mp.log(1-mp.exp(-mp.exp(e)))
def l_hurnb(y, e, z, a):
    if y == 0: return -mp.log(1+mp.exp(z))
    return lg1(z)+l_nb2(y, e, a)-mp.log(1-mp.exp(l_nb2(0, e, a)))
def logZ(e, nu):
    t = M(1); tot = M(1); k = 0; lam = mp.exp(e)
    while True:
        k += 1; t = t*lam/mp.mpf(k)**nu; tot += t
        if t < tot*M(10)**-(mp.mp.dps+2) and mp.mpf(k)**nu > lam: break
        if k > 20000: raise RuntimeError("Z")
    return mp.log(tot)
def l_cmp(y, e, a): nu = cexp(a); return y*e-nu*lfact(y)-logZ(e, nu)
def cmp_mean(e, nu):
    t = M(1); tot = M(1); m1 = M(0); m2 = M(0); k = 0; lam = mp.exp(e)
    while True:
        k += 1; t = t*lam/mp.mpf(k)**nu; tot += t; m1 += k*t; m2 += k*k*t
        if k*k*t < tot*M(10)**-(mp.mp.dps+2) and mp.mpf(k)**nu > lam: break
    m = m1/tot; return m, m2/tot-m*m
def l_cmpmu(y, e, a):
    nu = cexp(a); m = mp.exp(e); x = nu*mp.log(m+(nu-1)/(2*nu)) if m+(nu-1)/(2*nu) > 0 else nu*e
    for _ in range(200):
        mm, v = cmp_mean(x, nu); dx = (m-mm)/v
        if abs(dx) > 1: dx = mp.sign(dx)
        x += dx
        if abs(dx) < M(10)**-(mp.mp.dps-8): break
    return l_cmp(y, x, a)
FAM = {"nb2": (l_nb2, 0, 1), "nb1": (l_nb1, 0, 1), "zip": (l_zip, 1, 0), "zinb": (l_zinb, 1, 1), "hurdle_poisson": (l_hurp, 1, 0),
       "hurdle_nb2": (l_hurnb, 1, 1), "compoisson_lambda": (l_cmp, 0, 1), "compoisson_mean": (l_cmpmu, 0, 1), "nbp": (None, 0, 1)}
H = M(10)**-15
class Gen:
    def __init__(self, fam, y, X, off, Z=None, P=None, w=None):
        self.f, zi, au = FAM[fam]
        if fam == "nbp": self.f = lambda yy, e, a: l_nbp(yy, e, a, P)
        self.fam = fam; self.y = [int(t) for t in y]; self.X = X; self.off = off; self.Z = Z if zi else None; self.aux = au
        self.p = X.shape[1]; self.q = Z.shape[1] if zi else 0; self.k = self.p+self.q+au; self.n = X.shape[0]
        self.w = w if w is not None else [M(1)]*self.n
    def args(self, th):
        e = self.X.dot(th[:self.p])+self.off; a = [e]
        if self.q: a.append(self.Z.dot(th[self.p:self.p+self.q]))
        if self.aux: a.append([th[-1]]*self.n)
        return list(zip(*a))
    def ll(self, th): return sum((w*self.f(y, *a) for y, a, w in zip(self.y, self.args(th), self.w)), M(0))
    def lls(self, th): return [self.f(y, *a) for y, a in zip(self.y, self.args(th))]
    def derivs(self, th, second=True):
        k = self.k; g = np.array([M(0)]*k, dtype=object); Hs = np.array([[M(0)]*k for _ in range(k)], dtype=object); L = M(0)
        blocks = [self.X]+([self.Z] if self.q else [])+([np.array([[M(1)]]*self.n, dtype=object)] if self.aux else [])
        pos = [0]; 
        for B in blocks: pos.append(pos[-1]+B.shape[1])
        m = len(blocks); D1 = [[] for _ in range(m)]; D2 = {}
        cache = {}
        for y, a in zip(self.y, self.args(th)):
            key = (y,)+tuple(a); r = cache.get(key)
            if r is None:
                f0 = self.f(y, *a); up = []; dn = []
                for j in range(m):
                    aa = list(a); aa[j] = a[j]+H; up.append(self.f(y, *aa)); aa[j] = a[j]-H; dn.append(self.f(y, *aa))
                d1 = [(u-v)/(2*H) for u, v in zip(up, dn)]; d2 = {}
                for j in range(m):
                    d2[j, j] = (up[j]-2*f0+dn[j])/H**2
                    for l in range(j):
                        aa = list(a); aa[j] = a[j]+H; aa[l] = a[l]+H; pp = self.f(y, *aa); aa[j] = a[j]-H; aa[l] = a[l]-H; mm = self.f(y, *aa)
                        d2[j, l] = (pp+mm-up[j]-dn[j]-up[l]-dn[l]+2*f0)/(2*H**2)
                r = cache[key] = (f0, d1, d2)
            L += r[0]
            for j in range(m): D1[j].append(r[1][j])
            for kk, v in r[2].items(): D2.setdefault(kk, []).append(v)
        w = np.array(self.w, dtype=object); L = sum((wi*li for wi, li in zip(w, [cache[(y,)+tuple(a)][0] for y, a in zip(self.y, self.args(th))])), M(0))
        for j in range(m):
            g[pos[j]:pos[j+1]] = blocks[j].T.dot(w*np.array(D1[j], dtype=object))
        for (j, l), v in D2.items():
            Bm = blocks[j].T.dot((w*np.array(v, dtype=object))[:, None]*blocks[l]); Hs[pos[j]:pos[j+1], pos[l]:pos[l+1]] = Bm
            if j != l: Hs[pos[l]:pos[l+1], pos[j]:pos[j+1]] = Bm.T
        self.scores = np.hstack([blocks[j]*np.array(D1[j], dtype=object)[:, None] for j in range(m)])
        return L, g, Hs
    def fit(self, th, fixed=(), maxit=60, tol=M(10)**-26, verbose=False):
        th = np.array(th, dtype=object); fr = [i for i in range(self.k) if i not in fixed]
        for it in range(maxit):
            L, g, Hs = self.derivs(th)
            st = solve(-Hs[np.ix_(fr, fr)], g[fr]); m = max(abs(t) for t in st)
            k = M(1)
            if sum(a*b for a, b in zip(g[fr], st)) < 0: st = -st
            if m > M(10)**-4:
                while k > M(10)**-9:
                    t2 = th.copy(); t2[fr] = t2[fr]+k*st
                    if self.ll(t2) >= L: break
                    k /= 2
            th[fr] = th[fr]+k*st
            if verbose: print("   it", it, mp.nstr(m, 5), mp.nstr(L, 15), flush=True)
            if m < tol: break
        if m > M(10)**-13:      # one more pass needed to be sure
            raise RuntimeError("no convergence %s" % mp.nstr(m, 5))
        L, g, Hs = self.derivs(th)
        self.grad = g
        return th, L, Hs
# float log-likelihoods for starting values
def fl(fam, P=None):
    g = special.gammaln; lse = np.logaddexp
    def pois(y, e): return y*e-np.exp(e)-g(y+1)
    def nbr(y, m, r): return g(y+r)-g(r)-g(y+1)+r*np.log(r/(r+m))+y*np.log(m/(r+m))
    def nb2(y, e, a): return nbr(y, np.exp(e), np.exp(-a))
    def nb1(y, e, a): m = np.exp(e); return nbr(y, m, m*np.exp(-a))
    def nbp(y, e, a): m = np.exp(e); return nbr(y, m, m**(2-P)*np.exp(-a))
    z1 = lambda y, z, l, l0: np.where(y == 0, lse(z, l0), l)-np.log1p(np.exp(z))
    hu = lambda y, z, l, l0: np.where(y == 0, 0, z+l-np.log(-np.expm1(np.minimum(l0, -1e-300))))-np.log1p(np.exp(z))
    def cmpf(y, e, a):
        k = np.arange(0, 200)[:, None]; T = k*e-np.exp(a)*g(k+1); return y*e-np.exp(a)*g(y+1)-special.logsumexp(T, axis=0)
    return dict(nb2=nb2, nb1=nb1, nbp=nbp, zip=lambda y, e, z: z1(y, z, pois(y, e), -np.exp(e)), zinb=lambda y, e, z, a: z1(y, z, nb2(y, e, a), nb2(0*y, e, a)),
                hurdle_poisson=lambda y, e, z: hu(y, z, pois(y, e), -np.exp(e)), hurdle_nb2=lambda y, e, z, a: hu(y, z, nb2(y, e, a), nb2(0*y, e, a)),
                compoisson_lambda=cmpf, compoisson_mean=None)[fam]
def float_start(G, b, P=None, start=None):
    if G.fam == "compoisson_mean": return start
    f = fl(G.fam, P); X = np.array(G.X, float); Z = np.array(G.Z, float) if G.q else None; off = np.array(G.off, float); y = np.array(G.y, float)
    sx = np.abs(X).max(0); sx[sx == 0] = 1; sz = None
    if G.q: sz = np.abs(Z).max(0); sz[sz == 0] = 1
    sc = np.concatenate([1/sx]+([1/sz] if G.q else [])+([[1.]] if G.aux else []))
    w = np.array([float(t) for t in G.w])
    def nll(u):
        th = u*sc; a = [X@th[:G.p]+off]
        if G.q: a.append(Z@th[G.p:G.p+G.q])
        if G.aux: a.append(np.full(len(y), th[-1]))
        with np.errstate(all="ignore"): v = -np.sum(w*f(y, *a))
        return v if np.isfinite(v) else 1e15
    best = None
    for a0 in ([-0.5, -3., 0.7] if G.aux else [0]):
        for z0 in ([-1., .5] if G.q else [0]):
            u = np.concatenate([np.array(b, float)*sx]+([np.r_[z0, np.zeros(G.q-1)]] if G.q else [])+([[a0]] if G.aux else [])) if start is None else np.array(start, float)/sc
            r = optimize.minimize(nll, u, method="BFGS", options=dict(gtol=1e-7, maxiter=3000))
            r = optimize.minimize(nll, r.x, method="BFGS", options=dict(gtol=1e-8, maxiter=3000))
            if best is None or r.fun < best.fun: best = r
            if start is not None: break
    return [M(float(t)) for t in best.x*sc]
def gen_full(fam, y, X, off, names, Z=None, znames=None, P=None, extras=(), start=None, cluster=None, w=None, verbose=False):
    G = Gen(fam, y, X, off, Z, P, w); y_ = np.array(y, dtype=object)
    b, mu0, _, _ = poisson(y_, X, off)
    th = float_start(G, b, P, start); th, L, Hs = G.fit(th, verbose=verbose)
    V = inv(-Hs); k = G.k; p = G.p; n = G.n; se = [mp.sqrt(V[i, i]) for i in range(k)]
    R = dict(family=fam, names=names, n=n, coef=s(th[:p]), se=s(se[:p]), loglik=s(L), aic=s(-2*L+2*k), bic=s(-2*L+k*mp.log(n)), n_parameters=k,
             max_abs_score=mp.nstr(max(abs(t) for t in G.grad), 3), se_kind="inverse observed information of all parameters jointly")
    if G.q: R.update(zero_names=znames, zero_coef=s(th[p:p+G.q]), zero_se=s(se[p:p+G.q]), zero_part="logit of P(Y>0)" if "hurdle" in fam else "logit of P(structural zero)")
    R["cov"] = [s(r) for r in V]; R["cov_order"] = "coef, zero part if any, log(shape) if any"
    if G.aux:
        a = mp.exp(th[-1]); nm = {"nb1": "delta (var=mu(1+delta))", "nbp": "alpha (var=mu+alpha mu^p)"}.get(fam, "nu" if "comp" in fam else "alpha (var=mu+alpha mu^2)")
        R["shape"] = dict(name=nm, estimate=s(a), se=s(a*se[-1]), log_estimate=s(th[-1]), log_se=s(se[-1]))
        if P is not None: R["shape"]["p"] = P
    if fam == "nb2":
        al = mp.exp(th[-1]); mu = exps(X.dot(th[:p])+off)
        A = X.T.dot((mu/(1+al*mu))[:, None]*X); Ve = inv(A); R["se_expected_alpha_fixed"] = s([mp.sqrt(Ve[i, i]) for i in range(p)])
        R["deviance"] = s(2*sum((yi*mp.log(yi/mi) if yi > 0 else M(0))-(yi+1/al)*mp.log((1+al*yi)/(1+al*mi)) for yi, mi in zip(y_, mu)))
        R["pearson"] = s(sum((y_-mu)**2/(mu+al*mu**2)))
    if "robust" in extras or cluster is not None:
        S = G.scores; B = S.T.dot(S); C = V.dot(B).dot(V); R["HC0_joint_se"] = s([mp.sqrt(C[i, i]) for i in range(k)])
        if cluster is not None:
            gs = {}; 
            for i, c in enumerate(cluster): gs.setdefault(c, []).append(i)
            B = sum(np.outer(S[ix].sum(0), S[ix].sum(0)) for ix in gs.values()); C = V.dot(B).dot(V); g = len(gs)
            R["CR0_joint_se"] = s([mp.sqrt(C[i, i]) for i in range(k)]); R["CR1_joint_se"] = s([mp.sqrt(C[i, i]*M(g)/(g-1)) for i in range(k)])
    if "profile" in extras:
        R["profile95"] = [s(profile_gen(G, th, L, se, j)) for j in range(p)]
        if G.aux:
            q = profile_gen(G, th, L, se, k-1); R["profile95_shape"] = s([mp.exp(t) for t in q]) if q else None
    if "rootogram" in extras:
        K = max(G.y); R["rootogram"] = dict(observed=[sum(1 for t in G.y if t == kk) for kk in range(K+1)],
            expected=s([sum(mp.exp(G.f(kk, *a)) for a in G.args(th)) for kk in range(K+1)], 17))
    return R, G, th, L, V
def profile_gen(G, th, L, se, j):
    out = []; dirn = inv(-G.derivs(th)[2])[:, j]; dirn = dirn/dirn[j]
    for sg in (-1, 1):
        t = th[j]+sg*Z95*se[j]; cur = th+dirn*(t-th[j]); ok = False
        for it in range(60):
            cur = cur+dirn*(t-cur[j]); cur[j] = t
            try: cur, l, Hs = G.fit(cur, fixed=(j,), tol=M(10)**-16)
            except Exception: return None
            f = 2*(L-l)-CH95; d = f/(-2*G.grad[j])
            if abs(d) > 3*se[j]: d = mp.sign(d)*3*se[j]
            t = t-d
            if abs(d) < M(10)**-22*(1+abs(t)): ok = True; break
        if not ok: return None
        out.append(t)
    return out
def margins(d, n, terms, refs, names, b, V, expo, factor):
    """adjusted rate per unit exposure at each level of a factor, other covariates as observed"""
    out = []
    for lv in levels(d, factor, (refs or {}).get(factor)):
        dd = dict(d); cols = {}
        # keep the level set: build the design by substituting the factor column after expanding
        nm, X = design(d, n, terms, refs)
        X = X.copy()
        base = {}
        for j, t in enumerate(nm):
            pts = t.split(":")
            if any(q.startswith(factor+"[") for q in pts):
                val = np.array([M(1)]*n, dtype=object)
                for q in pts:
                    if q.startswith(factor+"["): val = val*(M(1) if q == "%s[%s]" % (factor, lv) else M(0))
                    else: val = val*X[:, nm.index(q)]
                X[:, j] = val
        r = exps(X.dot(b)); e = np.array(expo, dtype=object)
        row = dict(level=lv)
        for kind, w in (("row_mean", np.array([M(1)/n]*n, dtype=object)), ("exposure_weighted", e/sum(e))):
            m = sum(w*r); g = X.T.dot(w*r); v = g.dot(V).dot(g)
            row[kind] = dict(rate=s(m), se=s(mp.sqrt(v)), log_se=s(mp.sqrt(v)/m))
        out.append(row)
    return out
def vuong(l1, l2, k1, k2):
    n = len(l1); m = [a-b for a, b in zip(l1, l2)]; mb = sum(m)/n; v = sum((t-mb)**2 for t in m)
    o = {}
    for nm, c in (("raw", M(0)), ("aic_corrected", M(k1-k2)), ("bic_corrected", M(k1-k2)*mp.log(n)/2)):
        o[nm] = dict(z_sd_n=s((sum(m)-c)/mp.sqrt(n)/mp.sqrt(v/n)), z_sd_n_minus_1=s((sum(m)-c)/mp.sqrt(n)/mp.sqrt(v/(n-1))))
    return o
def rint_poisson(y, X, off, cluster, nodes=101):
    """Poisson-normal random intercept by adaptive Gauss-Hermite, double precision; returns estimates good to ~1e-9"""
    y = np.array(y, float); X = np.array(X, float); off = np.array(off, float); ids = np.unique(cluster, return_inverse=True)[1]; G = ids.max()+1
    x0, w0 = np.polynomial.hermite.hermgauss(nodes); p = X.shape[1]; lg = special.gammaln(y+1)
    def nll_grad(th, grad=True):
        b, sg = th[:p], np.exp(th[p]); eta = X@b+off
        Y = np.bincount(ids, y, G); C = np.bincount(ids, y*eta-lg, G); Mx = np.bincount(ids, np.exp(eta), G)
        u = np.zeros(G)
        for _ in range(100):   # mode of Y*sg*u - Mx*exp(sg*u) - u^2/2
            e = Mx*np.exp(sg*u); g1 = sg*Y-sg*e-u; h = sg*sg*e+1; du = np.clip(g1/h, -2, 2); u = u+du
            if np.max(np.abs(du)) < 1e-14: break
        tau = 1/np.sqrt(sg*sg*Mx*np.exp(sg*u)+1)
        U = u[:, None]+np.sqrt(2)*tau[:, None]*x0[None, :]
        lf = Y[:, None]*sg*U-Mx[:, None]*np.exp(sg*U)-U**2/2+x0**2+np.log(w0)
        mx = lf.max(1, keepdims=True); ex = np.exp(lf-mx); S = ex.sum(1); li = np.log(S)+mx[:, 0]+np.log(np.sqrt(2)*tau)-.5*np.log(2*np.pi)+C
        P = ex/S[:, None]; Ee = (P*np.exp(sg*U)).sum(1); gs = (P*(Y[:, None]*U-Mx[:, None]*U*np.exp(sg*U))).sum(1)
        g = np.r_[X.T@(y-np.exp(eta)*Ee[ids]), np.sum(gs)*sg]
        return -li.sum(), -g
    b = np.array(poisson(np.array([M(int(t)) for t in y], dtype=object), np.array([[M(float(v)) for v in r] for r in X], dtype=object), np.array([M(float(t)) for t in off], dtype=object))[0], float)
    r = optimize.minimize(nll_grad, np.r_[b, -0.5], jac=True, method="BFGS", options=dict(gtol=1e-8)); th = r.x
    def hess(th):
        k = p+1; Hh = np.zeros((k, k))
        for j in range(k):
            h = 1e-4*(1+abs(th[j])); acc = 0
            for c, m in ((8, 1), (-1, 2)):
                e = np.zeros(k); e[j] = m*h; acc = acc+c*(nll_grad(th+e)[1]-nll_grad(th-e)[1])
            Hh[:, j] = acc/(12*h)
        return (Hh+Hh.T)/2
    for _ in range(20):
        Hh = hess(th); st = np.linalg.solve(Hh, nll_grad(th)[1]); th = th-st
        if np.max(np.abs(st)) < 1e-13: break
    Hh = hess(th); V = np.linalg.inv(Hh); L = -nll_grad(th)[0]; sg = math.exp(th[p])
    return dict(coef=["%.12g" % t for t in th[:p]], se=["%.9g" % t for t in np.sqrt(np.diag(V))[:p]], sigma="%.12g" % sg, sigma_se="%.9g" % (sg*math.sqrt(V[p, p])),
                loglik="%.13g" % L, nodes=nodes, digits="coef 10, se 7", se_kind="inverse observed information, joint with log sigma")
