/* The least arithmetic that one spectrum needs, compiled: 48 nodes on the real axis with the fluxes on both sides and 64 nodes of a
 * contour for the radiated power, both polarisations, uniform depth; one thread, no quadrature set-up, no ledger. Its outputs are
 * no outcomes: it tells how long the arithmetic takes on this machine, so that times can be given as ratios. */
#include <complex.h>
#include <math.h>
typedef double complex C;
static inline C sq(C v){ C s=csqrt(v); return cimag(s)<0?-s:s; }
// one node: layers N, film j; returns K, top flux, bottom flux (uniform depth average, isotropic)
static void node(int N,int j,const C*n2k2,const double*d,double kr,C q,int real_axis,double*K,double*top,double*bot){
  C q2=q*q, kz[16], e1[16];
  for(int i=0;i<N;i++){ kz[i]=sq(n2k2[i]-q2); if(i>0&&i<N-1&&i!=j) e1[i]=cexp(I*kz[i]*d[i]); }
  C kf=kz[j]; double df=d[j]; C e2=cexp(2*I*kf*df); C x=2*I*kf*df; C A=(e2-1)/x;
  double ka=cimag(kf),be=creal(kf);
  double P=0,Q=0; C X=0;
  if(real_axis){ double y=2*ka*df; double ey=exp(-y); P=y>1e-9?(1-ey)/y:1; Q=ey*P; C w=-2*I*be*df; X=e2*(cabs(w)>1e-9?(cexp(w)-1)/w:1); }
  *K=*top=*bot=0;
  for(int p=0;p<2;p++){
    C ad[16]; for(int i=0;i<N;i++) ad[i]=p?kz[i]/n2k2[i]:kz[i];
    C r[16]; C ru,rd; double fu,fd;
    // down
    C rr=(ad[N-2]-ad[N-1])/(ad[N-2]+ad[N-1]); r[N-2]=rr;
    for(int i=N-3;i>=j;i--){ C rij=(ad[i]-ad[i+1])/(ad[i]+ad[i+1]); C y=rr*e1[i+1]*e1[i+1]; rr=(rij+y)/(1+rij*y); r[i]=rr; }
    rd=rr; 
    if(real_axis){ C amp=1; for(int i=j;i<N-1;i++){ C F=amp*(1+r[i]); if(i+1==N-1){ C G=ad[i]*amp*(1-r[i]); fd=creal(F*conj(G)); } else amp=F/(1+r[i+1]*e1[i+1]*e1[i+1])*e1[i+1]; } }
    rr=(ad[1]-ad[0])/(ad[1]+ad[0]); r[1]=rr;
    for(int i=2;i<=j;i++){ C rij=(ad[i]-ad[i-1])/(ad[i]+ad[i-1]); C y=rr*e1[i-1]*e1[i-1]; rr=(rij+y)/(1+rij*y); r[i]=rr; }
    ru=rr;
    if(real_axis){ C amp=1; for(int i=j;i>0;i--){ C F=amp*(1+r[i]); if(i-1==0){ C G=ad[i]*amp*(1-r[i]); fu=creal(F*conj(G)); } else amp=F/(1+r[i-1]*e1[i-1]*e1[i-1])*e1[i-1]; } }
    C D=1-ru*rd*e2, S=(ru+rd)*A, T=1+ru*rd*e2;
    C kk;
    if(!p) kk=0.5*q/kf/kr*(T+S)/D; else kk=(0.5*q*kf/n2k2[j]/kr*(T-S)+0.5*q*q2/(n2k2[j]*kf)/kr*(T+S))/D;
    ((double*)K)[0]+=creal(kk);
    if(real_axis){
      double iD=1/(creal(D)*creal(D)+cimag(D)*cimag(D)); double akf2=be*be+ka*ka;
      double gd=P+(creal(rd)*creal(rd)+cimag(rd)*cimag(rd))*Q, hd=2*creal(rd*X);
      double gu=P+(creal(ru)*creal(ru)+cimag(ru)*cimag(ru))*Q, hu=2*creal(ru*X);
      double qq=creal(q);
      if(!p){ double c=0.25*qq/kr/akf2*iD; *top+=c*(gd+hd)*fu; *bot+=c*(gu+hu)*fd; }
      else { double ch=0.25*qq/kr*iD, cv=0.25*qq*qq*qq/kr/akf2*iD; *top+=(ch*(gd-hd)+cv*(gd+hd))*fu; *bot+=(ch*(gu-hu)+cv*(gu+hu))*fd; }
    }
  }
}
void run(int nl,int N,int j,const double*lam,const double*nre,const double*nim,const double*d,int nq,const double*t,double*out){
  for(int l=0;l<nl;l++){ double k0=2*M_PI/lam[l]; C n2[16]; for(int i=0;i<N;i++){ C n=nre[i*nl+l]+I*nim[i*nl+l]; n2[i]=n*n*k0*k0; }
    double kr=nre[j*nl+l]*k0; double K,a,b,sK=0,sa=0,sb=0;
    for(int m=0;m<nq;m++){ node(N,j,n2,d,kr,t[m]*1.5*k0,m<48,&K,&a,&b); sK+=K; sa+=a; sb+=b; }
    out[l]=sK+sa+sb; }
}
